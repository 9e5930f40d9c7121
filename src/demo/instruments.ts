import { mkdir, open, rename } from 'node:fs/promises'
import { join } from 'node:path'
import { setTimeout as pause } from 'node:timers/promises'
import { type Curve, type Measurement, measure } from './chemistry.ts'
import { difdupLines } from './difdup.ts'
import { seeded } from './random.ts'

/** An instrument of the demonstration: how it writes a spectrum, and into which file. */
export interface DemoInstrument {
  readonly name: string
  readonly measurements: readonly Measurement[]
  readonly fileName: (curve: Curve) => string
  readonly write: (curve: Curve) => string
  /** Writes under another name and renames when done, as many programs do; else under the final name from the start. */
  readonly renames: boolean
}

const iso = (at: number): string => new Date(at).toISOString()
const comma = (value: number, digits: number): string => value.toFixed(digits).replace('.', ',')

/** Semicolons, decimal commas, a header block, longest wavelength first. */
export const delimitedText = (curve: Curve): string => {
  const rows = curve.nm.map((nm, i) => `${comma(nm, 1)};${comma(curve.absorbance[i]!, 5)}`).reverse()
  const header = [
    `Sample;${curve.sample}`,
    'Instrument;double beam, north bench',
    `Measured;${iso(curve.at)}`,
    'Cell;10 mm',
    '',
    'Wavelength (nm);Absorbance',
  ]
  return `${[...header, ...rows].join('\r\n')}\r\n`
}

const Y_FACTOR = 1e-4

/** JCAMP-DX 4.24 with DIFDUP compression. */
export const jcampDx = (curve: Curve): string => {
  const ordinates = curve.absorbance.map((a) => Math.round(a / Y_FACTOR))
  const [first, last] = [curve.nm[0]!, curve.nm.at(-1)!]
  const y = (ordinate: number) => (ordinate * Y_FACTOR).toFixed(4)
  return `${[
    `##TITLE= ${curve.sample}`,
    '##JCAMP-DX= 4.24',
    '##DATA TYPE= UV/VIS SPECTRUM',
    '##ORIGIN= single beam, south bench',
    '##OWNER= lab.example',
    `##DATE= ${iso(curve.at).slice(2, 10).replaceAll('-', '/')}`,
    `##TIME= ${iso(curve.at).slice(11, 19)}`,
    '##PATHLENGTH= 1.0',
    '##XUNITS= NANOMETERS',
    '##YUNITS= ABSORBANCE',
    `##FIRSTX= ${first}`,
    `##LASTX= ${last}`,
    `##DELTAX= ${curve.nm[1]! - first}`,
    `##NPOINTS= ${ordinates.length}`,
    `##FIRSTY= ${y(ordinates[0]!)}`,
    `##MAXY= ${y(Math.max(...ordinates))}`,
    `##MINY= ${y(Math.min(...ordinates))}`,
    '##XFACTOR= 1',
    `##YFACTOR= ${Y_FACTOR}`,
    '##XYDATA= (X++(Y..Y))',
    ...difdupLines(ordinates, (point) => String(curve.nm[point])),
    '##END=',
  ].join('\r\n')}\r\n`
}

const CHUNKS = 4
/** Pause between two chunks; now and then the program on the instrument does something else for a while. */
const PAUSE_MS = 40
const LONG_PAUSE_MS = 250
const BETWEEN_FILES_MS = 120

/** Measures and writes everything in order, slowly and in pieces. Ends early when told to. */
export const playInstrument = async (
  instrument: DemoInstrument,
  dropFolder: string,
  seed: number,
  signal: AbortSignal,
): Promise<void> => {
  await mkdir(dropFolder, { recursive: true })
  const random = seeded(seed)
  for (const [i, measurement] of instrument.measurements.entries()) {
    const curve = measure(measurement, seed + i)
    await writeSlowly(join(dropFolder, instrument.fileName(curve)), instrument.write(curve), instrument.renames, {
      signal,
      pauseMs: () => (random() < 0.1 ? LONG_PAUSE_MS : PAUSE_MS),
    })
    await pause(BETWEEN_FILES_MS, undefined, { signal })
  }
}

const writeSlowly = async (
  path: string,
  text: string,
  renames: boolean,
  { signal, pauseMs }: { signal: AbortSignal; pauseMs: () => number },
): Promise<void> => {
  const growing = renames ? `${path}.part` : path
  const file = await open(growing, 'w')
  try {
    const size = Math.ceil(text.length / CHUNKS)
    for (let from = 0; from < text.length; from += size) {
      await file.write(text.slice(from, from + size))
      await pause(pauseMs(), undefined, { signal })
    }
  } finally {
    await file.close()
  }
  if (renames) await rename(growing, path)
}
