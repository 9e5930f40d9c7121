import {
  AQUAPENTAAMMINE,
  CHLOROPENTAAMMINE,
  type Compound,
  HEXAAQUA,
  type Measurement,
  partReplaced,
  TRIS_EN,
} from './chemistry.ts'

export const FRESH = 'FRESH-CL'
export const DRIFTING = 'AGE-CL-1'
export const STEADY_ON_UV1 = 'EN-7'
export const STEADY_ON_UV2 = 'AQUA-3'

/** First day of the invented week. */
const BEGAN = Date.UTC(2026, 2, 2, 5)
const HOUR_MS = 3_600_000
const DAYS = 6
const PER_DAY = 4
const FRESH_RUNS = 5

const pentaammine = (ageMs: number): Measurement['contents'] => {
  const replaced = partReplaced(ageMs)
  return [
    [CHLOROPENTAAMMINE, 0.012 * (1 - replaced)],
    [AQUAPENTAAMMINE, 0.012 * replaced],
  ]
}
const steady = (compound: Compound, molPerL: number): Measurement['contents'] => [[compound, molPerL]]

/** When each sample is measured: every six hours for six days, minutes apart on one instrument. */
const rounds = Array.from({ length: DAYS * PER_DAY }, (_, i) => BEGAN + (i * 24 * HOUR_MS) / PER_DAY)

/**
 * Five portions of a fresh batch, each dissolved when its turn comes, in the hour before the study (one solution
 * measured five times would have begun to drift: a reference with a slope is refused); then the sample that drifts
 * from the start, and a steady one.
 */
export const UV1: readonly Measurement[] = [
  ...Array.from({ length: FRESH_RUNS }, (_, i) => ({
    sample: FRESH,
    at: BEGAN - HOUR_MS + i * 120_000,
    contents: pentaammine(0),
  })),
  ...rounds.flatMap((at) => [
    { sample: DRIFTING, at, contents: pentaammine(at - BEGAN) },
    { sample: STEADY_ON_UV1, at: at + 600_000, contents: steady(TRIS_EN, 0.006) },
  ]),
]

export const UV2: readonly Measurement[] = rounds.map((at) => ({
  sample: STEADY_ON_UV2,
  at: at + 300_000,
  contents: steady(HEXAAQUA, 0.032),
}))
