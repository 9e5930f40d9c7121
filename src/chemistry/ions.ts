/**
 * Ions with d electrons: Racah B of the free ion (cm⁻¹) and C/B, each with where it comes from. A nephelauxetic ratio
 * β = B/B₀ means nothing without its B₀, and published B₀ of one ion differ by up to 12 %, so the other values in use
 * are named too. C/B is a prior for complexes: mostly the value of the usual energy diagrams, with ±0.3 as the spread
 * between published sets.
 */
import type { Ion } from '../ligandField/types.ts'

export interface KnownIon extends Ion {
  /** Other published free-ion B, cm⁻¹. */
  readonly otherFreeIonBPerCm: readonly number[]
  readonly cOverBSource: string
  /** Jørgensen's g, cm⁻¹; null where not in the list. */
  readonly gPerCm: number | null
  /** Jørgensen's k; null where not in the list. */
  readonly k: number | null
}

const JOLLY = 'Jolly, Modern Inorganic Chemistry'
const MEMORY = 'from memory'
const TS = 'value of the Tanabe-Sugano diagrams'

/** Jørgensen's g (cm⁻¹) and k of the central ion: Δ = f g, β = 1 − h k with f, h of the ligands (ligands.ts). */
const JORGENSEN: Readonly<Record<string, readonly [g: number, k: number | null]>> = {
  'Mn2+': [8000, 0.07],
  'Ni2+': [8700, 0.12],
  'Co2+': [9000, 0.09],
  'V2+': [12000, 0.08],
  'Fe3+': [14000, 0.24],
  'Cr3+': [17400, 0.21],
  'Co3+': [18200, 0.35],
  'Ru2+': [20000, null],
  'Mn4+': [24000, 0.5],
  'Mo3+': [24600, 0.15],
  'Rh3+': [27000, 0.3],
  'Ir3+': [32000, 0.3], // one copy of the list has 8.0 for g/10³, a misprint
  'Pt4+': [36000, 0.5],
}

/** Δ of the hexaaqua ion or alum where g is not in the list; from memory. */
const AQUA: Readonly<Record<string, number>> = {
  'Ti3+': 20300,
  'V3+': 18500,
  'Cr2+': 14000,
  'Mn3+': 21000,
  'Fe2+': 10000,
  'Cu2+': 12500,
}

type Row = readonly [
  symbol: string,
  d: number,
  freeIonB: number | null,
  source: string,
  others: readonly number[],
  cOverB: number,
  cOverBSource: string,
  usualSpin?: 'high' | 'low',
]

const ROWS: readonly Row[] = [
  ['Ti3+', 1, null, 'one electron has no B', [], 4.5, 'not needed'],
  ['V4+', 1, null, 'one electron has no B', [], 4.5, 'not needed'],
  ['Ti2+', 2, 718, MEMORY, [], 3.7, MEMORY],
  ['V3+', 2, 861, JOLLY, [], 4.42, `${TS}, ${MEMORY}`],
  ['V2+', 3, 755, JOLLY, [], 4.5, TS],
  ['Cr3+', 3, 918, JOLLY, [1030], 4.5, TS],
  ['Mn4+', 3, 1064, MEMORY, [], 4.5, TS],
  ['Mo3+', 3, 610, MEMORY, [], 4.5, TS],
  ['Cr2+', 4, 810, JOLLY, [], 4.61, TS, 'high'],
  ['Mn3+', 4, 965, JOLLY, [], 4.61, TS, 'high'],
  ['Mn2+', 5, 860, JOLLY, [960], 4.48, MEMORY, 'high'],
  ['Fe3+', 5, 1015, JOLLY, [], 4.48, TS, 'high'],
  ['Fe2+', 6, 917, JOLLY, [], 4.41, MEMORY, 'high'],
  ['Co3+', 6, 1065, JOLLY, [], 4.5, 'between 4 (complexes as published) and 4.8 (diagram)', 'low'],
  ['Ru2+', 6, 620, MEMORY, [], 4.5, MEMORY, 'low'],
  ['Rh3+', 6, 720, MEMORY, [], 4.5, MEMORY, 'low'],
  ['Ir3+', 6, 660, MEMORY, [], 4.5, MEMORY, 'low'],
  ['Pt4+', 6, 720, MEMORY, [], 4.5, MEMORY, 'low'],
  ['Co2+', 7, 971, JOLLY, [], 4.633, TS, 'high'],
  ['Ni3+', 7, 1115, JOLLY, [], 4.633, TS, 'low'],
  ['Ni2+', 8, 1030, JOLLY, [1041, 1080], 4.71, MEMORY],
  ['Cu2+', 9, null, 'one hole has no B', [], 4.5, 'not needed'],
]

/** The table, by d count. */
export const IONS: readonly KnownIon[] = ROWS.map(
  ([symbol, d, freeIonBPerCm, freeIonBSource, others, cOverB, cOverBSource, usualSpin]) => ({
    symbol,
    d,
    freeIonBPerCm,
    freeIonBSource,
    otherFreeIonBPerCm: others,
    cOverB,
    uCOverB: 0.3,
    cOverBSource,
    usualSpin: usualSpin ?? null,
    // 1.1 g: the middle of f from water to amines
    typicalDeltaPerCm: JORGENSEN[symbol] === undefined ? (AQUA[symbol] ?? null) : 1.1 * JORGENSEN[symbol][0],
    gPerCm: JORGENSEN[symbol]?.[0] ?? null,
    k: JORGENSEN[symbol]?.[1] ?? null,
  }),
)

/** Ions that people ask for and that have no d–d bands. */
const EMPTY = ['Ca2+', 'Sc3+', 'Ti4+', 'V5+', 'Cr6+', 'Mn7+', 'Y3+', 'Zr4+', 'Mo6+']
const FULL = ['Cu+', 'Zn2+', 'Ga3+', 'Ag+', 'Cd2+', 'Hg2+', 'Au+']

export type IonSearch =
  | { readonly kind: 'found'; readonly ion: KnownIon }
  | {
      readonly kind: 'unknown'
      readonly nearest: string | null
      /** In words: unknown, or known to have no d–d bands. */
      readonly why: string
    }

const ROMAN: Readonly<Record<string, number>> = { i: 1, ii: 2, iii: 3, iv: 4, v: 5, vi: 6, vii: 7 }
const RAISED = '⁰¹²³⁴⁵⁶⁷⁸⁹'

/** `Cr3+`, `Cr+3`, `cr3+`, `Cr(III)`, `CrIII`, `Cr³⁺` → `Cr3+`; null where it reads as no ion. */
const normalise = (text: string): string | null => {
  const plain = [...text.trim()]
    .map((c) => (RAISED.includes(c) ? String(RAISED.indexOf(c)) : c === '⁺' ? '+' : c))
    .join('')
    .replace(/[\s^[\]]/g, '')
  const element = (name: string): string => name[0]!.toUpperCase() + name.slice(1).toLowerCase()
  const say = (name: string, charge: number): string => `${element(name)}${charge === 1 ? '' : charge}+`
  const digits = /^([A-Za-z]{1,2})(?:(\d)\+|\+(\d)|(\+))$/.exec(plain)
  if (digits !== null) return say(digits[1]!, Number(digits[2] ?? digits[3] ?? 1))
  const bracketed = /^([A-Za-z]{1,2})\(([ivIV]+|\d)\+?\)$/.exec(plain) ?? /^([A-Z][a-z]?)([IV]+)$/.exec(plain)
  if (bracketed === null) return null
  const charge = ROMAN[bracketed[2]!.toLowerCase()] ?? Number(bracketed[2])
  return Number.isInteger(charge) && charge > 0 ? say(bracketed[1]!, charge) : null
}

/** Edits (insert, delete, replace) from one word to another. */
const distance = (a: string, b: string): number => {
  let row = Array.from({ length: b.length + 1 }, (_, j) => j)
  for (let i = 1; i <= a.length; i += 1) {
    const next = [i]
    for (let j = 1; j <= b.length; j += 1)
      next.push(Math.min(row[j]! + 1, next[j - 1]! + 1, row[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1)))
    row = next
  }
  return row[b.length]!
}

const nearestTo = (text: string): string | null => {
  const asked = text.toLowerCase()
  const ranked = IONS.map(({ symbol }) => ({ symbol, edits: distance(asked, symbol.toLowerCase()) })).sort(
    (a, b) => a.edits - b.edits,
  )
  const best = ranked[0]!
  return best.edits <= 2 ? best.symbol : null
}

/** The ion a person means by `Cr3+`, `Cr(III)`, `cr3+`, `Cr³⁺`; else the nearest in the table and why it is not there. */
export const findIon = (text: string): IonSearch => {
  const symbol = normalise(text)
  const ion = IONS.find((known) => known.symbol === symbol)
  if (ion !== undefined) return { kind: 'found', ion }
  if (symbol !== null && EMPTY.includes(symbol))
    return { kind: 'unknown', nearest: null, why: `${symbol} is d0 and has no d-d bands` }
  if (symbol !== null && FULL.includes(symbol))
    return { kind: 'unknown', nearest: null, why: `${symbol} is d10, a full shell, and has no d-d bands` }
  return { kind: 'unknown', nearest: nearestTo(symbol ?? text), why: `"${text}" is not in the table of ions` }
}
