/**
 * NTUPLES of JCAMP-DX 5.x (Lampen et al., Pure Appl. Chem. 71 (1999) 1549): several tables in one block, one a page, their variables described
 * together by lists. Each page becomes a block such as 4.24 would write, so that one set of checks reads them all.
 */
import type { Fault } from '../fault.ts'
import type { Block, JcampRecord } from './jcampRecords.ts'

/** The value of the page variable, `T= 100`, with what its lists say of it. */
export interface PageValue {
  /** As written. */
  readonly text: string
  readonly value: number | null
  readonly name: string
  readonly units: string
  readonly line: number
}

export interface Page {
  readonly block: Block
  readonly table: JcampRecord
  readonly page: PageValue | null
}

export interface Pages {
  readonly pages: readonly Page[]
  readonly faults: readonly Fault[]
}

/** Lists with an entry for each variable. */
const LISTS = ['VARNAME', 'SYMBOL', 'VARTYPE', 'VARFORM', 'VARDIM', 'UNITS', 'FIRST', 'LAST', 'MIN', 'MAX', 'FACTOR']

interface List {
  readonly entries: readonly string[]
  readonly line: number
}

export const pagesOf = (block: Block, file: string): Pages => {
  const start = block.records.findIndex(({ label }) => label === 'NTUPLES')
  const end = block.records.findIndex(({ label }) => label === 'ENDNTUPLES')
  const head = block.records[start]!
  const fault = (line: number, code: string, what: string, remedy = 'export the file again'): Pages => ({
    pages: [],
    faults: [{ code, place: { at: file, line }, what, remedy }],
  })
  if (end < start)
    return fault(head.line, 'cut-short', '##NTUPLES= has no ##END NTUPLES=', 'copy the file again when it is complete')
  const inside = block.records.slice(start + 1, end)
  const outside = [...block.records.slice(0, start), ...block.records.slice(end + 1)]
  const firstPage = inside.findIndex(({ label }) => label === 'PAGE' || label === 'DATATABLE')
  const common = listsIn(inside.slice(0, Math.max(0, firstPage)))
  const symbols = (common.get('SYMBOL')?.entries ?? []).map((symbol) => symbol.toUpperCase())
  if (symbols.length === 0)
    return fault(head.line, 'label-missing', 'SYMBOL is missing: nothing says what the tables hold')
  for (const [label, { entries, line }] of common)
    if (entries.length > symbols.length)
      return fault(line, 'list-length', `${label} has ${entries.length} entries for ${symbols.length} symbols`)
  const pages: Page[] = []
  const faults: Fault[] = []
  let page: JcampRecord | null = null
  let own: JcampRecord[] = []
  for (const record of inside.slice(Math.max(0, firstPage))) {
    if (record.label === 'PAGE') {
      if (page) faults.push(emptyPage(page, file))
      page = record
      own = []
    } else if (record.label === 'DATATABLE') {
      const lists = new Map([...common, ...listsIn(own)])
      const made = pageOf(
        { outside, own, lists, symbols, page, record, isFirst: pages.length === 0, line: block.line },
        file,
      )
      if ('code' in made) faults.push(made)
      else pages.push(made)
      page = null
    } else own.push(record)
  }
  if (page) faults.push(emptyPage(page, file))
  return { pages, faults: [...faults, ...pageCount(common, pages.length, faults.length, file)] }
}

const emptyPage = (page: JcampRecord, file: string): Fault => ({
  code: 'no-ordinates',
  place: { at: file, line: page.line },
  what: `the page ${page.value} has no ##DATA TABLE=`,
  remedy: 'export the file again',
})

const listsIn = (records: readonly JcampRecord[]): ReadonlyMap<string, List> =>
  new Map(
    records
      .filter(({ label }) => LISTS.includes(label))
      .map(({ label, value, body, line }) => {
        const text = [value, ...body.map((more) => more.text.trim())].join(' ')
        return [label, { entries: text.split(',').map((entry) => entry.trim()), line }]
      }),
  )

/** Pages there are against those that VAR_DIM says; a file that was cut at a page's end shows nowhere else. */
const pageCount = (
  common: ReadonlyMap<string, List>,
  count: number,
  faulty: number,
  file: string,
): readonly Fault[] => {
  const at = common.get('VARTYPE')?.entries.findIndex((type) => type.toUpperCase() === 'PAGE') ?? -1
  const dim = common.get('VARDIM')
  const said = at < 0 ? '' : (dim?.entries[at] ?? '')
  if (said === '' || Number(said) === count || faulty > 0) return []
  return [
    {
      code: 'page-count',
      place: { at: file, line: dim!.line },
      what: `VAR_DIM says ${said} pages, there are ${count}`,
      remedy: 'the file was cut short or changed: export it again',
    },
  ]
}

interface Parts {
  readonly outside: readonly JcampRecord[]
  readonly own: readonly JcampRecord[]
  readonly lists: ReadonlyMap<string, List>
  readonly symbols: readonly string[]
  readonly page: JcampRecord | null
  readonly record: JcampRecord
  readonly isFirst: boolean
  readonly line: number
}

const FORMS = [
  { pattern: /^\((\w)\+\+\(\1?(\w)\.\.\2\)\)/, label: 'XYDATA', form: '(X++(Y..Y))' },
  { pattern: /^\((\w)(\w)\.\.\1\2\)/, label: 'XYPOINTS', form: '(XY..XY)' },
] as const

const pageOf = (parts: Parts, file: string): Page | Fault => {
  const { outside, own, lists, symbols, page, record, isFirst, line } = parts
  const wrong = (code: string, what: string): Fault => ({
    code,
    place: { at: file, line: record.line },
    what,
    remedy: 'export the file again',
  })
  const written = record.value.replace(/\s/g, '').toUpperCase()
  const found = FORMS.flatMap(({ pattern, ...rest }) => {
    const m = pattern.exec(written)
    return m ? [{ ...rest, x: m[1]!, y: m[2]! }] : []
  })[0]
  if (!found) return wrong('unknown-table', `a table of the form "${record.value}" is not read`)
  const [x, y] = [symbols.indexOf(found.x), symbols.indexOf(found.y)]
  if (x < 0 || y < 0)
    return wrong('unknown-table', `the table names ${found.x} and ${found.y}, SYMBOL says ${symbols.join(', ')}`)
  const entry = (label: string, k: number): JcampRecord | null => {
    const list = lists.get(label)
    const value = list?.entries[k] ?? ''
    return list === undefined || value === '' ? null : { label, name: label, value, line: list.line, body: [] }
  }
  const named = (label: string, from: JcampRecord | null): readonly JcampRecord[] =>
    from === null ? [] : [{ ...from, label, name: label }]
  const count = own.find(({ label }) => label === 'NPOINTS') ?? entry('VARDIM', y) ?? entry('VARDIM', x)
  // extrema and first ordinate of the common lists are those of all pages together
  const isOwn = (label: string) => own.some((one) => one.label === label)
  const records: readonly JcampRecord[] = [
    ...outside,
    ...named('XUNITS', entry('UNITS', x)),
    ...named('YUNITS', entry('UNITS', y)),
    ...named('XFACTOR', entry('FACTOR', x)),
    ...named('YFACTOR', entry('FACTOR', y)),
    ...named('FIRSTX', entry('FIRST', x)),
    ...named('LASTX', entry('LAST', x)),
    ...named('NPOINTS', count),
    ...(isFirst || isOwn('FIRST') ? named('FIRSTY', entry('FIRST', y)) : []),
    ...(isOwn('MAX') ? named('MAXY', entry('MAX', y)) : []),
    ...(isOwn('MIN') ? named('MINY', entry('MIN', y)) : []),
    ...own.filter(({ label }) => !LISTS.includes(label) && label !== 'NPOINTS'),
  ]
  const table: JcampRecord = { ...record, label: found.label, value: found.form }
  return {
    block: { line, records: [...records, table], inner: [] },
    table,
    page: page && pageValue(page, lists, symbols),
  }
}

const pageValue = (page: JcampRecord, lists: ReadonlyMap<string, List>, symbols: readonly string[]): PageValue => {
  const m = /^(\w+)\s*=\s*([+-]?[\d.]+(?:[eE][+-]?\d+)?)$/.exec(page.value)
  const k = m ? symbols.indexOf(m[1]!.toUpperCase()) : -1
  const of = (label: string) => lists.get(label)?.entries[k] ?? ''
  return {
    text: page.value,
    value: m ? Number(m[2]) : null,
    name: of('VARNAME'),
    units: of('UNITS'),
    line: page.line,
  }
}
