/** Writers for the tests, made from the published tables and not from the readers. */
const SQZ = '@ABCDEFGHIabcdefghi'
const DIF = '%JKLMNOPQRjklmnopqr'
const DUP = ['', 'S', 'T', 'U', 'V', 'W', 'X', 'Y', 'Z', 's']

const coded = (alphabet: string, value: number): string => {
  const digits = String(Math.abs(value))
  const lead = Number(digits[0])
  return alphabet[value < 0 ? 9 + lead : lead]! + digits.slice(1)
}

/** One line of ordinates as differences, equal ones counted where `dup`. */
export const dif = (y: readonly number[], dup: boolean): string => {
  let out = coded(SQZ, y[0]!)
  for (let i = 1; i < y.length; ) {
    const step = y[i]! - y[i - 1]!
    let end = i + 1
    while (dup && end < y.length && y[end]! - y[end - 1]! === step) end++
    out += coded(DIF, step)
    const count = String(end - i)
    if (end - i > 1) out += DUP[Number(count[0])]! + count.slice(1)
    i = end
  }
  return out
}

export type Form = 'AFFN' | 'PAC' | 'SQZ' | 'DIF' | 'DIFDUP'

const line: Readonly<Record<Form, (y: readonly number[]) => string>> = {
  AFFN: (y) => ` ${y.join(' ')}`,
  PAC: (y) => y.map((v) => (v < 0 ? String(v) : `+${v}`)).join(''),
  SQZ: (y) => y.map((v) => coded(SQZ, v)).join(''),
  DIF: (y) => dif(y, false),
  DIFDUP: (y) => dif(y, true),
}

/** Lines of an (X++(Y..Y)) table. */
const tableLines = (x: readonly number[], y: readonly number[], form: Form, perLine: number): readonly string[] => {
  const differs = form === 'DIF' || form === 'DIFDUP'
  const lines: string[] = []
  let check = false
  for (let i = 0; i < y.length; i += perLine) {
    const part = y.slice(i, i + perLine)
    lines.push(check ? x[i - 1] + line[form]([y[i - 1]!, ...part]) : x[i] + line[form](part))
    check = differs && (check || part.length > 1)
  }
  if (check) lines.push(x.at(-1) + coded(SQZ, y.at(-1)!))
  return lines
}

/** A JCAMP-DX file of whole ordinates in units of `yFactor`, `perLine` to a line. */
export const writeJcamp = (
  x: readonly number[],
  y: readonly number[],
  form: Form,
  perLine: number,
  yFactor = 1e-5,
): Uint8Array => {
  const lines = tableLines(x, y, form, perLine)
  const head = [
    '##TITLE= made up',
    '##JCAMP-DX= 4.24',
    '##DATA TYPE= UV/VIS SPECTRUM',
    '##XUNITS= NANOMETERS',
    '##YUNITS= ABSORBANCE',
    '##XFACTOR= 1',
    `##YFACTOR= ${yFactor}`,
    `##FIRSTX= ${x[0]}`,
    `##LASTX= ${x.at(-1)}`,
    `##NPOINTS= ${y.length}`,
    `##FIRSTY= ${y[0]! * yFactor}`,
    '##XYDATA= (X++(Y..Y))',
  ]
  return new TextEncoder().encode(`${[...head, ...lines, '##END='].join('\n')}\n`)
}

/** The same spectrum on two pages of NTUPLES, ten seconds apart. */
export const writeNtuples = (
  x: readonly number[],
  y: readonly number[],
  form: Form,
  perLine: number,
  yFactor = 1e-5,
): Uint8Array => {
  const page = (seconds: number) => [
    `##PAGE= T= ${seconds}`,
    '##DATA TABLE= (X++(Y..Y)), XYDATA',
    ...tableLines(x, y, form, perLine),
  ]
  const lines = [
    '##TITLE= made up',
    '##JCAMP-DX= 5.01',
    '##DATA TYPE= UV/VIS SPECTRUM',
    '##LONGDATE= 2026/03/02 09:00:00 +0100',
    '##NTUPLES= UV/VIS SPECTRUM',
    '##VAR_NAME= WAVELENGTH, ABSORBANCE, TIME',
    '##SYMBOL= X, Y, T',
    '##VAR_TYPE= INDEPENDENT, DEPENDENT, PAGE',
    `##VAR_DIM= ${x.length}, ${x.length}, 2`,
    '##UNITS= NANOMETERS, ABSORBANCE, SECONDS',
    `##FACTOR= 1, ${yFactor}, 1`,
    `##FIRST= ${x[0]}, ${y[0]! * yFactor}, 0`,
    `##LAST= ${x.at(-1)}, ${y.at(-1)! * yFactor}, 10`,
    ...page(0),
    ...page(10),
    '##END NTUPLES= UV/VIS SPECTRUM',
    '##END=',
  ]
  return new TextEncoder().encode(`${lines.join('\n')}\n`)
}

export interface WrittenDialect {
  readonly delimiter: ',' | ';' | '\t' | '|' | ' '
  readonly decimal: '.' | ','
  readonly eol: '\n' | '\r' | '\r\n'
  readonly encoding: 'utf-8' | 'utf-8-bom' | 'utf-16le' | 'utf-16be' | 'latin-1'
  readonly heading: readonly [x: string, y: string]
  readonly exponent: 'none' | 'e' | 'E' | 'D'
  readonly quoted: boolean
  readonly header: readonly string[]
  readonly footer: readonly string[]
}

const encode = (text: string, encoding: WrittenDialect['encoding']): Uint8Array => {
  if (encoding === 'utf-8') return new TextEncoder().encode(text)
  if (encoding === 'utf-8-bom') return new TextEncoder().encode(`\uFEFF${text}`)
  if (encoding === 'latin-1') return Buffer.from(text, 'latin1')
  const wide = Buffer.from(`\uFEFF${text}`, 'utf16le')
  return encoding === 'utf-16le' ? wide : wide.swap16()
}

/** A table of numbers in one dialect. */
export const writeTable = (x: readonly number[], y: readonly number[], d: WrittenDialect): Uint8Array => {
  const number = (v: number) => {
    const text = d.exponent === 'none' ? String(v) : v.toExponential().replace('e', d.exponent)
    const marked = text.replace('.', d.decimal)
    return d.quoted ? `"${marked}"` : marked
  }
  const name = (text: string) => (d.quoted || text.includes(d.delimiter) ? `"${text}"` : text)
  const rows = x.map((v, i) => `${number(v)}${d.delimiter}${number(y[i]!)}`)
  const lines = [...d.header, d.heading.map(name).join(d.delimiter), ...rows, ...d.footer]
  return encode(`${lines.join(d.eol)}${d.eol}`, d.encoding)
}

/** A row of wavelengths over the same spectrum twice, in one dialect. */
export const writeMatrix = (x: readonly number[], y: readonly number[], d: WrittenDialect): Uint8Array => {
  const number = (v: number) => String(v).replace('.', d.decimal)
  const lines = [
    'Absorbance',
    ['sample', ...x.map((v) => `${number(v)} nm`)].join(d.delimiter),
    ...['S-1', 'S-2'].map((name) => [name, ...y.map(number)].join(d.delimiter)),
  ]
  return encode(`${lines.join(d.eol)}${d.eol}`, d.encoding)
}
