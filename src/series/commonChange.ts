/**
 * What several samples did together.
 *
 * A departure d_i is how far the newest occasion of a sample is from that sample's own reference, on a scale on which one
 * cause in the room gives every sample the same number: nm for positions (a wavelength axis that slips moves all bands by
 * as many nm), the logarithm for heights and widths (a dirty window, a wrong path), the plain difference otherwise. u_i
 * combines the occasion with its reference, the occasion's part being the larger of its repeatability and the scatter seen
 * in the reference.
 *
 * The common part c is the median of the control samples where there are any, else of all samples. Its uncertainty u_c is
 * the median u_i: it does not shrink with the number of samples, since what is not repeatable from one day to the
 * next is shared by all that is measured on that day, and must not pass for a change. A change is common when
 *
 *   |c| > RINGS · u_c, and
 *   without controls: TOGETHER or more samples, and two thirds of all, are within 3 (u_i² + u_c²)½ or |c|/4 of c;
 *   with controls: half of the other samples, one at least, went the same way by |c|/2 or more (they may have moved by
 *   themselves as well).
 *
 * It is over when |c| < CLEARS · u_c or nothing moves together any more.
 */
import { median } from './statistics.ts'
import type { Occasion, ReferenceState } from './types.ts'

const RINGS = 4
const CLEARS = 2.5
/** Samples at the least that must agree where no control sample tells what is common. */
export const TOGETHER = 3
const AGREE_U = 3
const AGREE_PART = 0.25
const AGREE_SHARE = 2 / 3
const FOLLOW_PART = 0.5

/** Quantities in which a common change is looked for, and that are put right when a sample's own part is asked for. */
export const COMMON_QUANTITIES: readonly string[] = [
  ...[1, 2, 3].flatMap((n) => [`nu${n}`, `max${n}`, `width${n}`, `height${n}`]),
  ...['delta_o', 'b', 'c', 'beta', 'scatter', 'offset'],
]

/** nm, or a plain number: the natural logarithm of a ratio, or the difference in the quantity's own unit. */
export type CommonScale = 'nm' | 'log' | 'plain'

export const scaleOf = (quantity: string): CommonScale =>
  /^(nu\d|max\d|delta_o)$/.test(quantity) ? 'nm' : /^(height|width)\d$/.test(quantity) ? 'log' : 'plain'

/** How far a sample is from its reference, with its standard uncertainty, on the scale of the quantity. */
export type Departure = readonly [d: number, u: number]

export interface SampleDepartures {
  readonly sample: string
  readonly control: boolean
  readonly departures: Readonly<Record<string, Departure>>
}

/** What is common in one quantity. */
export interface CommonPart {
  readonly quantity: string
  readonly c: number
  readonly u: number
  /** Names of the samples that went along; controls included. */
  readonly together: readonly string[]
  /** Whether controls told it. */
  readonly byControls: boolean
  readonly standing: 'rings' | 'holds' | 'clears'
}

/** Departures of an occasion from the reference; quantities that either lacks, or whose uncertainty is unknown, left out. */
export const departuresOf = (occasion: Occasion, reference: ReferenceState): Readonly<Record<string, Departure>> => {
  if (reference.kind !== 'ready') return {}
  return Object.fromEntries(
    COMMON_QUANTITIES.flatMap((quantity) => {
      const departure = departureOf(quantity, occasion, reference)
      return departure === null ? [] : [[quantity, departure]]
    }),
  )
}

const departureOf = (
  quantity: string,
  { values, u }: Occasion,
  reference: Extract<ReferenceState, { kind: 'ready' }>,
): Departure | null => {
  const [now, before] = [values[quantity] ?? null, reference.values[quantity] ?? null]
  if (now === null || before === null) return null
  const scatter = (reference.u[quantity] ?? 0) * Math.sqrt(Math.max(1, reference.occasions))
  const spread = Math.hypot(Math.max(u[quantity] ?? 0, scatter), reference.u[quantity] ?? 0)
  if (!(spread > 0)) return null
  switch (scaleOf(quantity)) {
    case 'nm':
      return now > 0 && before > 0 ? [1e7 / now - 1e7 / before, (spread * 1e7) / before ** 2] : null
    case 'log':
      return now > 0 && before > 0 ? [Math.log(now / before), spread / before] : null
    case 'plain':
      return [now - before, spread]
  }
}

/** The common part of every quantity for which there is enough to tell; empty while nothing can be said. */
export const commonParts = (samples: readonly SampleDepartures[]): readonly CommonPart[] =>
  COMMON_QUANTITIES.flatMap((quantity) => commonPart(quantity, samples) ?? [])

interface One {
  readonly sample: string
  readonly control: boolean
  readonly d: number
  readonly u: number
}

const commonPart = (quantity: string, samples: readonly SampleDepartures[]): CommonPart | null => {
  const all = samples.flatMap(({ sample, control, departures }): readonly One[] => {
    const found = departures[quantity]
    return found === undefined ? [] : [{ sample, control, d: found[0], u: found[1] }]
  })
  const controls = all.filter(({ control }) => control)
  const byControls = samples.some(({ control }) => control)
  const telling = byControls ? controls : all
  if (telling.length < (byControls ? 1 : TOGETHER) || all.length === controls.length) return null
  const c = median(telling.map(({ d }) => d))
  const u = median(telling.map((one) => one.u))
  const going = byControls ? followers(all, c) : agreeing(all, c, u)
  const isTogether = byControls
    ? 2 * going.length >= all.length - controls.length && going.length > 0
    : going.length >= TOGETHER && going.length >= AGREE_SHARE * all.length
  return {
    quantity,
    c,
    u,
    byControls,
    together: [...(byControls ? controls : []), ...going].map(({ sample }) => sample),
    standing: !isTogether || Math.abs(c) < CLEARS * u ? 'clears' : Math.abs(c) > RINGS * u ? 'rings' : 'holds',
  }
}

const agreeing = (all: readonly One[], c: number, u: number): readonly One[] =>
  all.filter((one) => Math.abs(one.d - c) <= Math.max(AGREE_U * Math.hypot(one.u, u), AGREE_PART * Math.abs(c)))

const followers = (all: readonly One[], c: number): readonly One[] =>
  all.filter(({ control, d }) => !control && d * c > 0 && Math.abs(d) >= FOLLOW_PART * Math.abs(c))

/** The occasions from `since` on with the common parts taken out of them: what the sample did by itself. */
export const withoutCommon = (
  occasions: readonly Occasion[],
  parts: readonly CommonPart[],
  since: number,
): readonly Occasion[] =>
  occasions.map((occasion) => {
    if (occasion.at < since) return occasion
    const values = { ...occasion.values }
    for (const { quantity, c } of parts) values[quantity] = putRight(quantity, values[quantity] ?? null, c)
    return { ...occasion, values }
  })

const putRight = (quantity: string, value: number | null, c: number): number | null => {
  if (value === null) return null
  switch (scaleOf(quantity)) {
    case 'nm':
      return 1e7 / (1e7 / value - c)
    case 'log':
      return value * Math.exp(-c)
    case 'plain':
      return value - c
  }
}

/** What the room may have done, in the contract's words, with the evidence. */
export const causeOfCommon = (
  parts: readonly CommonPart[],
): { readonly diagnosis: 'wavelength' | 'temperature' | 'optics' | 'unclear'; readonly evidence: string } => {
  const moved = parts.filter(({ c, u }) => Math.abs(c) > AGREE_U * u)
  const of = (pattern: RegExp) => moved.filter(({ quantity }) => pattern.test(quantity))
  const known = (pattern: RegExp) => parts.filter(({ quantity }) => pattern.test(quantity))
  const [positions, heights, widths] = [of(/^nu\d$/), of(/^height\d$/), of(/^width\d$/)]
  if (positions.length === 0)
    return heights.length > 0 || of(/^(scatter|offset)$/).length > 0
      ? {
          diagnosis: 'optics',
          evidence:
            'The bands stayed where they were, while heights or background of all samples changed alike: cell, blank, window or lamp.',
        }
      : { diagnosis: 'unclear', evidence: 'What the samples have in common fits no cause that is known here.' }
  const isOneShift =
    positions.length >= 2 && positions.length === known(/^nu\d$/).length && areOne(positions) && widths.length === 0
  if (isOneShift)
    return {
      diagnosis: 'wavelength',
      evidence: `All bands of all samples moved by the same number of nm (${positions[0]!.c.toFixed(2)} nm), and no width changed, as a shift of the wavelength axis would do.`,
    }
  // warmer: bands go to the red and become broader (common knowledge of d-d bands, from memory)
  if (
    widths.length > 0 &&
    positions.every(({ c }) => c * widths[0]!.c > 0) &&
    widths.every(({ c }) => c * widths[0]!.c > 0)
  )
    return {
      diagnosis: 'temperature',
      evidence: `The bands of all samples went to the ${positions[0]!.c > 0 ? 'red and became broader, as when they are measured warmer' : 'blue and became narrower, as when they are measured colder'}.`,
    }
  return {
    diagnosis: 'unclear',
    evidence:
      positions.length === 1 && known(/^nu\d$/).length === 1
        ? 'One band alone does not tell a shift of the wavelength axis from a change of temperature, or from samples that age alike.'
        : 'Neither one shift in nm of all bands nor warmer samples would do this; samples that age alike would.',
  }
}

const areOne = (parts: readonly CommonPart[]): boolean => {
  const mean = parts.reduce((sum, { c }) => sum + c, 0) / parts.length
  return parts.every(({ c, u }) => Math.abs(c - mean) <= Math.max(AGREE_U * u, 0.1 * Math.abs(mean)))
}
