/** JCAMP-DX 4.24 (McDonald & Wilks, Appl. Spectrosc. 42 (1988) 151) and 5.x (Lampen et al., Pure Appl. Chem. 71 (1999) 1549). */
import type { Fault } from '../fault.ts'
import { axisFault } from './axis.ts'
import { factsOf, type Pair } from './facts.ts'
import { type Page, pagesOf } from './jcampNtuples.ts'
import { onPage } from './jcampPage.ts'
import { type Block, blocksOf, textOf } from './jcampRecords.ts'
import { pointsOf } from './jcampTable.ts'
import { settleYaml } from './settle.ts'
import { decodeText, linesOf } from './text.ts'
import type { AxisUnit, OrdinateKind, RawSpectrum, Reader, Reading, ReadingHints } from './types.ts'
import { axisWords, ordinateKind, ordinateWords } from './words.ts'

type BlockReading =
  | { readonly kind: 'spectrum'; readonly spectrum: RawSpectrum; readonly forms: string }
  | { readonly kind: 'faulty'; readonly faults: readonly Fault[]; readonly settle: readonly string[] }

/** Reads JCAMP-DX, XYDATA, XYPOINTS and NTUPLES, alone or in LINK blocks. */
export const jcampDx: Reader = {
  format: 'JCAMP-DX',
  confidence: (bytes) => {
    if (!bytes.includes(0x23)) return 0 // no `#` in any encoding
    const decoded = decodeText(bytes)
    if (decoded.kind === 'binary') return 0
    if (/^\s*(?:\$\$[^\n\r]*\s*)*##\s*TITLE\s*=/i.test(decoded.text)) return 1
    return /^\s*##[^=\n\r]+=/m.test(decoded.text) ? 0.7 : 0
  },
  read: (bytes, file, hints) => {
    const decoded = decodeText(bytes)
    if (decoded.kind === 'binary')
      return refused(
        [{ code: 'not-text', place: { at: file }, what: `this is no text: ${decoded.why}`, remedy: 'export it again' }],
        [],
        [],
      )
    const { blocks, faults } = blocksOf(linesOf(decoded.text), file)
    const found: BlockReading[] = []
    const linkFaults: Fault[] = []
    for (const block of blocks) gather(block, file, hints, found, linkFaults)
    const spectra = found
      .flatMap((reading) => (reading.kind === 'spectrum' ? [reading.spectrum] : []))
      .map((s, index) => ({ ...s, index }))
    const wrong = [
      ...faults,
      ...linkFaults,
      ...found.flatMap((reading) => (reading.kind === 'faulty' ? reading.faults : [])),
    ]
    const settle = found.flatMap((reading) => (reading.kind === 'faulty' ? reading.settle : []))
    if (wrong.length > 0) return refused(wrong as [Fault, ...Fault[]], [...new Set(settle)], spectra)
    if (spectra.length === 0)
      return refused(
        [
          {
            code: 'no-spectrum',
            place: { at: file },
            what: 'no block holds a table of points',
            remedy: 'export it with XYDATA or XYPOINTS',
          },
        ],
        [],
        [],
      )
    const forms = [...new Set(found.flatMap((reading) => (reading.kind === 'spectrum' ? [reading.forms] : [])))].join(
      '; ',
    )
    const version = versionOf(blocks)
    return {
      kind: 'read',
      format: version === null ? 'JCAMP-DX' : `JCAMP-DX ${version}`,
      dialect: `${forms}, ${decoded.encoding}, ${spectra.length === 1 ? 'one block' : `${spectra.length} blocks`}`,
      spectra,
      warnings: [],
    }
  },
}

const refused = (
  faults: readonly [Fault, ...Fault[]],
  settle: readonly string[],
  spectra: readonly RawSpectrum[],
): Reading => ({ kind: 'refused', format: 'JCAMP-DX', faults, settle, spectra })

const versionOf = (blocks: readonly Block[]): string | null => {
  for (const block of blocks) {
    const own = textOf(block, 'JCAMPDX')
    const version = own === null ? versionOf(block.inner) : own
    if (version !== null) return version
  }
  return null
}

const gather = (block: Block, file: string, hints: ReadingHints, found: BlockReading[], faults: Fault[]): void => {
  const blocks = textOf(block, 'BLOCKS')
  // some writers count the outer block too
  if (
    blocks !== null &&
    block.inner.length > 0 &&
    ![block.inner.length, block.inner.length + 1].includes(Number(blocks))
  ) {
    faults.push({
      code: 'block-count',
      place: { at: file, line: block.line },
      what: `BLOCKS says ${blocks}, there are ${block.inner.length}`,
      remedy: 'the file was cut short or changed: export it again',
    })
  }
  const tables = block.records.filter(({ label }) => ['XYDATA', 'XYPOINTS'].includes(label))
  const other = block.records.find(({ label }) =>
    ['DATATABLE', 'PEAKTABLE', 'PEAKASSIGNMENTS', 'RADATA'].includes(label),
  )
  if (block.records.some(({ label }) => label === 'NTUPLES')) {
    const { pages, faults: wrong } = pagesOf(block, file)
    faults.push(...wrong)
    for (const page of pages) found.push(readPage(page, file, hints))
  } else if (tables.length > 1)
    found.push(
      faulty(file, tables[1]!.line, 'two-tables', 'a block with two tables', 'give each spectrum a block of its own'),
    )
  else if (tables[0]) found.push(readBlock(block, tables[0], file, hints))
  else if (other)
    found.push(
      faulty(file, other.line, 'unknown-table', `##${other.name}= is not read`, 'export it with XYDATA or XYPOINTS'),
    )
  for (const inner of block.inner) gather(inner, file, hints, found, faults)
}

const faulty = (
  file: string,
  line: number,
  code: string,
  what: string,
  remedy: string,
  settle: readonly string[] = [],
): BlockReading => ({
  kind: 'faulty',
  faults: [{ code, place: { at: file, line }, what, remedy }],
  settle,
})

const readPage = ({ block, table, page }: Page, file: string, hints: ReadingHints): BlockReading => {
  const reading = readBlock(block, table, file, hints)
  if (reading.kind === 'faulty') return reading
  return { ...reading, forms: `NTUPLES ${reading.forms}`, spectrum: onPage(reading.spectrum, page, file) }
}

const readBlock = (block: Block, table: Block['records'][number], file: string, hints: ReadingHints): BlockReading => {
  const points = pointsOf(block, table, file)
  if (points.kind === 'faulty') return { kind: 'faulty', faults: [points.fault], settle: [] }
  const warnings: Fault[] = [...points.warnings]
  const unit = xUnitOf(block, hints)
  const line = (label: string) => block.records.find((record) => record.label === label)?.line ?? table.line
  if (typeof unit !== 'object')
    return faulty(file, line('XUNITS'), 'axis-unit', unit, 'say which with `reading: { x: … }`')
  if (unit.contradicts !== null)
    warnings.push({
      code: 'hint-contradicts',
      place: { at: file, line: line('XUNITS') },
      what: unit.contradicts,
      remedy: 'check `reading: { x: … }`',
    })
  const kind = yKindOf(block, points.y, hints)
  if (kind.kind === 'open')
    return faulty(
      file,
      line('YUNITS'),
      kind.code,
      kind.what,
      'say which with `reading: { y: … }`',
      kind.readings.map((y) => settleYaml({ y })),
    )
  if (kind.warning !== null)
    warnings.push({
      code: 'ordinate-scale',
      place: { at: file, line: line('YUNITS') },
      what: kind.warning,
      remedy: 'check `reading: { y: … }`',
    })
  const fault = axisFault(points.x, points.y, unit.x, (i) => ({ at: file, line: points.lines[i] ?? table.line }))
  if (fault) return { kind: 'faulty', faults: [fault], settle: [] }
  const facts = factsOf(pairsOf(block), file)
  return {
    kind: 'spectrum',
    forms: `${table.label} ${points.forms}`,
    spectrum: {
      index: 0,
      x: points.x,
      y: points.y,
      xUnit: unit.x,
      medium: unit.x === 'nm' || unit.x === 'um' ? (hints.medium ?? null) : null,
      yKind: kind.y,
      sample: facts.sample,
      title: textOf(block, 'TITLE') || null,
      time: facts.time,
      pathMm: facts.pathMm,
      temperatureC: facts.temperatureC,
      concentrationMolPerL: facts.concentrationMolPerL,
      header: Object.fromEntries(
        block.records.filter((r) => r !== table).map((r) => [r.name.toLowerCase(), textOf(block, r.label) ?? '']),
      ),
      warnings: [...warnings, ...facts.warnings],
    },
  }
}

const xUnitOf = (
  block: Block,
  hints: ReadingHints,
): { readonly x: AxisUnit; readonly contradicts: string | null } | string => {
  const text = textOf(block, 'XUNITS') ?? ''
  const [said, second] = axisWords(text).units
  if (hints.x !== undefined)
    return {
      x: hints.x,
      contradicts:
        said === undefined || said === hints.x
          ? null
          : `XUNITS says ${text}, the configuration ${hints.x}, which was taken`,
    }
  if (said === undefined || said === 'angstrom' || second !== undefined)
    return text === '' ? 'XUNITS is missing' : `XUNITS "${text}" is no unit that is read here`
  return { x: said, contradicts: null }
}

type KindReading =
  | { readonly kind: 'known'; readonly y: OrdinateKind; readonly warning: string | null }
  | { readonly kind: 'open'; readonly code: string; readonly what: string; readonly readings: readonly OrdinateKind[] }

const yKindOf = (block: Block, y: Float64Array, hints: ReadingHints): KindReading => {
  const text = textOf(block, 'YUNITS') ?? ''
  const words = ordinateWords(text)
  let largest = 0
  for (let i = 0; i < y.length; i++) if (y[i]! > largest && y[i]! < Infinity) largest = y[i]!
  if (hints.y !== undefined) return { kind: 'known', y: hints.y, warning: null }
  if (words.kind !== 'known')
    return {
      kind: 'open',
      code: 'ordinate-unknown',
      what: text === '' ? 'YUNITS is missing' : `YUNITS "${text}" is no ordinate that can be fitted`,
      readings: [],
    }
  const kind = ordinateKind(words.quantity, words.percent, largest)
  if (kind.kind === 'open')
    return {
      kind: 'open',
      code: 'ordinate-scale',
      what: `${kind.why} ${kind.readings.length > 0 ? `may be ${kind.readings.join(' or ')}` : 'is impossible'}`,
      readings: kind.readings,
    }
  const scaled = kind.y.startsWith('percent-') && !words.percent
  return {
    kind: 'known',
    y: kind.y,
    warning: scaled ? `YUNITS ${text} means a fraction; values up to ${largest} can only be percent` : null,
  }
}

/** The labels of the standard that state facts, in the words and units the standard gives them. */
const pairsOf = (block: Block): readonly Pair[] => {
  const pairs: Pair[] = []
  const add = (label: string, key: string, write: (value: string) => string = (v) => v) => {
    const record = block.records.find((r) => r.label === label && r.value !== '')
    if (record) pairs.push({ key, value: write(record.value), line: record.line })
  }
  const bare = (unit: string) => (v: string) => (/^[+-]?[\d.]+$/.test(v) ? `${v} ${unit}` : v)
  add('LONGDATE', 'date and time')
  // the standard writes YY/MM/DD; 1988 is its year of birth, so 70 and above are of the last century
  add('DATE', 'date', (v) =>
    v.replace(/^(\d{2})(?=[/-]\d{1,2}[/-]\d{1,2}$)/, (yy) => `${Number(yy) >= 70 ? 19 : 20}${yy}`),
  )
  add('TIME', 'time')
  add('SAMPLEDESCRIPTION', 'sample')
  add('PATHLENGTH', 'path length', bare('cm'))
  add('TEMPERATURE', 'temperature', bare('°C'))
  add(
    'CONCENTRATIONS',
    'concentration',
    (v) => /\(\s*[^,]*,\s*([\d.eE+-]+)\s*,\s*([^)]*)\)/.exec(v)?.slice(1, 3).join(' ').trim() ?? v,
  )
  return pairs
}
