/** The numbers that the labels of a JCAMP-DX block state, each with the unit of its last written place. */
import type { Fault } from '../fault.ts'
import type { Block } from './jcampRecords.ts'

export const PLAIN = /^[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?$/

/** A number of a header and the size of a unit in its last written place. */
export interface Written {
  readonly value: number
  readonly unit: number
  readonly line: number
}

export const unitOf = (text: string): number => {
  const point = text.indexOf('.')
  if (!/[eE]/.test(text)) return point < 0 ? 1 : 10 ** (point + 1 - text.length)
  const [mantissa, exponent] = text.toLowerCase().split('e') as [string, string?]
  const digits = mantissa.includes('.') ? mantissa.length - mantissa.indexOf('.') - 1 : 0
  return 10 ** (Number(exponent ?? 0) - digits)
}

export interface Numbers {
  readonly of: (label: string) => Written | null
  readonly fault: Fault | null
}

const NUMERIC = ['XFACTOR', 'YFACTOR', 'FIRSTX', 'LASTX', 'DELTAX', 'NPOINTS', 'FIRSTY', 'MAXY', 'MINY', 'MAXX', 'MINX']
const MOVES_NOTHING = ['FIRSTY', 'MAXY', 'MINY']

export const numbersOf = (block: Block, file: string): Numbers => {
  const found = new Map<string, Written>()
  const fault = (line: number, code: string, what: string): Numbers => ({
    of: () => null,
    fault: { code, place: { at: file, line }, what, remedy: 'export the file again' },
  })
  for (const { label, name, value, line } of block.records) {
    if (!NUMERIC.includes(label) || value === '') continue
    if (!PLAIN.test(value)) {
      if (MOVES_NOTHING.includes(label)) continue
      return fault(line, 'not-a-number', `##${name}= "${value}" is no number`)
    }
    const earlier = found.get(label)
    if (earlier && earlier.value !== Number(value))
      return fault(line, 'label-twice', `##${name}= stands twice, with ${earlier.value} and ${value}`)
    found.set(label, { value: Number(value), unit: unitOf(value), line })
  }
  return { of: (label) => found.get(label) ?? null, fault: null }
}
