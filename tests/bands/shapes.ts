/** Spectra of shapes that no recipe of Gaussians holds: skewed bands, a vibrational ripple, a hidden weak band, a tilted baseline. */
import { prepareSpectrum } from '../../src/spectrum/index.ts'
import type { Spectrum } from '../../src/spectrum/types.ts'

export const KINDS = ['skew', 'ripple', 'hidden', 'tilt', 'all'] as const
export type Kind = (typeof KINDS)[number]

export interface Shaped {
  readonly spectrum: Spectrum
  /** Maxima and full widths of the bands, hidden ones left out, cm⁻¹. */
  readonly bands: readonly (readonly [position: number, width: number])[]
}

/** One, two or three bands lie about here, cm⁻¹. */
const PLACES = [
  [[13000, 22000]],
  [
    [15500, 19000],
    [23000, 26500],
  ],
  [
    [13500, 15500],
    [20000, 22500],
    [27000, 30000],
  ],
] as const

/** Log-normal (Fraser & Suzuki, Anal. Chem. 41 (1969) 37, from memory). */
export const skewedBand = (x: number, p: number, w: number, h: number, b: number): number => {
  if (b === 0) return h * Math.exp(-4 * Math.LN2 * ((x - p) / w) ** 2)
  const a = 1 + (2 * b * (x - p)) / w
  return a <= 0 ? 0 : h * Math.exp(-Math.LN2 * (Math.log(a) / b) ** 2)
}

export const shaped = (kind: Kind, count: 1 | 2 | 3, random: () => number, normal: () => number): Shaped => {
  const between = (a: number, b: number) => a + (b - a) * random()
  const has = (one: Kind) => kind === one || kind === 'all'
  const bands = PLACES[count - 1]!.map(
    ([from, to]) =>
      [between(from, to), between(2600, 4500), between(0.15, 0.9), has('skew') ? between(-0.3, 0.3) : 0] as const,
  )
  const ripple = has('ripple') ? between(0.005, 0.05) : 0
  const period = between(300, 900)
  const [p, w, h] = bands[0]!
  const aside = (0.2 + 0.5 * random()) * w * (random() < 0.5 ? -1 : 1)
  const hidden = has('hidden') ? ([p + aside, between(1500, 3000), h * between(0.04, 0.2)] as const) : null
  const tilt = has('tilt') ? between(-0.1, 0.2) : 0
  const scatter = between(0, 0.05)
  const constant = between(-0.01, 0.03)
  const flank = random() < 0.4 ? ([between(36000, 42000), between(5000, 8000), between(0.5, 2)] as const) : null
  const noise = 10 ** between(-4.3, -2.7)
  const curve = (x: number): number => {
    let sum = bands.reduce((total, band) => total + skewedBand(x, ...band), 0)
    if (hidden) sum += skewedBand(x, ...hidden, 0)
    sum *= 1 + ripple * Math.sin((2 * Math.PI * x) / period)
    if (flank) sum += skewedBand(x, ...flank, 0)
    return sum + constant + scatter * (x / 18182) ** 4 + (tilt * (x - 18000)) / 20000
  }
  const from = Math.round(between(300, 330))
  const step = [0.5, 1, 2][Math.floor(3 * random())]!
  const points = Math.floor((Math.round(between(800, 900)) - from) / step) + 1
  const x = Float64Array.from({ length: points }, (_, i) => from + i * step)
  const prepared = prepareSpectrum(
    {
      index: 0,
      x,
      y: x.map((nm) => curve(1e7 / nm) + noise * normal()),
      xUnit: 'nm',
      medium: 'vacuum',
      yKind: 'absorbance',
      ...{ sample: null, title: null, time: null, pathMm: null, temperatureC: null, concentrationMolPerL: null },
      header: {},
      warnings: [],
    },
    { medium: 'vacuum', absorbanceLimit: 3, bandwidthNm: 1 },
  )
  if (prepared.kind === 'refused') throw new Error(prepared.faults[0].what)
  return { spectrum: prepared.spectrum, bands: bands.map((band) => [band[0], band[1]]) }
}

/** What the room of the bands makes of a number of such spectra. */
export interface Tally {
  bands: number
  found: number
  /** Of those found, within twice u_model and u together, or within 2 cm⁻¹. */
  covered: number
  unfitted: number
}
