import type { Fault } from '../fault.ts'
import type { AxisUnit, RawSpectrum } from '../readers/types.ts'
import { findGaps, findSteps } from './axisFlaws.ts'
import { localNoise, NOISE_FLOOR, readingStep } from './noise.ts'
import { limitOf, type Ordinate, ordinateOf } from './ordinate.ts'
import { findSpikes } from './spikes.ts'
import type { Flag, PrepareOptions, Spectrum } from './types.ts'
import { nominalNm, vacuumPerCm } from './units.ts'

export type Preparation =
  | { readonly kind: 'prepared'; readonly spectrum: Spectrum }
  | { readonly kind: 'refused'; readonly faults: readonly [Fault, ...Fault[]] }

/** Fewer used points than this carry the flag `too-few-points`. */
const FEW = 20

/** No spectrum of d–d bands is measured outside: below, air absorbs; above, it is vibrations. nm */
const REACH_NM = [150, 50_000] as const

/**
 * Makes a spectrum ready to be fitted: vacuum wavenumbers in ascending order, absorbance (or Kubelka–Munk), local noise, a
 * mask and flags. Refuses an axis that could not be what its unit says, one abscissa with two different
 * ordinates, and an ordinate that cannot be of its kind.
 */
export const prepareSpectrum = (raw: RawSpectrum, options: PrepareOptions): Preparation => {
  const kind = options.y ?? raw.yKind
  const faults = [...axisFaults(raw), ...scaleFaults(raw.y, kind)]
  const [first, ...others] = faults
  if (first) return { kind: 'refused', faults: [first, ...others] }

  const ascending = sorted(raw, raw.medium ?? (isWavelength(raw.xUnit) ? options.medium : 'vacuum'))
  const merged = withoutRepeats(ascending)
  if (merged.kind === 'contradiction') return { kind: 'refused', faults: [merged.fault] }
  const { perCm, axis, rawY } = merged
  const remarks: [Flag, string][] = []
  const say = (flag: Flag, text: string) => remarks.push([flag, text])
  const where = (indices: readonly number[]) => sayPlaces(indices, axis, raw.xUnit)

  const ordinate = ordinateOf(kind)
  const value = rawY.map(ordinate.value)
  const used = maskOf(rawY, value, ordinate, limitOf(ordinate.kind, options.absorbanceLimit))
  if (used.saturated.length > 0) {
    const limit = Number(limitOf(ordinate.kind, options.absorbanceLimit).toPrecision(4))
    say(
      'saturated',
      `${count(used.saturated.length, 'point')} above ${limit} or without light, masked: ${where(used.saturated)}`,
    )
  }
  if (used.missing.length > 0)
    say('gap', `${count(used.missing.length, 'ordinate')} missing in the file: ${where(used.missing)}`)
  const holes = findGaps(axis)
  if (holes.length > 0) say('gap', `${count(holes.length, 'hole')} in the axis, after ${where(holes)}`)

  const quantum = readingStep(rawY) / Math.sqrt(12)
  const floor = rawY.map((y, i) =>
    used.mask[i] === 1 ? Math.max(quantum * ordinate.slope(y), NOISE_FLOOR) : NOISE_FLOOR,
  )
  const stepNm = medianStepNm(axis, raw.xUnit)
  const noiseWithSpikes = localNoise(perCm, value, used.mask, floor)
  const spike = findSpikes(perCm, value, used.mask, noiseWithSpikes, stepNm, options.bandwidthNm)
  const spikes = [...spike.keys()].filter((i) => spike[i] === 1)
  for (const i of spikes) used.mask[i] = 0
  if (spikes.length > 0) {
    say(
      'spike',
      `${count(spikes.length, 'point')} in or beside a spike narrower than the bandwidth, masked: ${where(spikes)}`,
    )
  }
  const noise = spikes.length > 0 ? localNoise(perCm, value, used.mask, floor) : noiseWithSpikes
  const negative = [...value.keys()].filter((i) => used.mask[i] === 1 && value[i]! < -Math.max(5 * noise[i]!, 0.005))
  if (negative.length > 0) {
    say(
      'negative',
      `${count(negative.length, 'point')} below zero by more than the noise: ${where(negative)}; check the blank`,
    )
  }
  const steps = findSteps(perCm, value, used.mask, noise)
  if (steps.length > 0) say('lamp-step', `a step in the curve at ${where(steps)}, as where a lamp or detector changes`)
  const left = used.mask.reduce((a, b) => a + b, 0)
  if (left < FEW) say('too-few-points', `only ${count(left, 'point')} can enter a fit`)
  return {
    kind: 'prepared',
    spectrum: {
      wavenumberPerCm: perCm,
      absorbance: value,
      noise,
      used: used.mask,
      ordinate: ordinate.kind,
      medium: raw.medium ?? options.medium,
      pathMm: raw.pathMm,
      flags: [...new Set(remarks.map(([flag]) => flag))],
      remarks: [
        ...remarks.map(([, text]) => text),
        ...(merged.repeats > 0 ? [`${count(merged.repeats, 'repeated point')} with the same ordinate left out`] : []),
      ],
    },
  }
}

const isWavelength = (unit: AxisUnit): boolean => unit === 'nm' || unit === 'um'

const fault = (raw: RawSpectrum, code: string, what: string, remedy: string): Fault => ({
  code,
  place: { at: `spectrum ${raw.index + 1}` },
  what,
  remedy,
})

const axisFaults = (raw: RawSpectrum): readonly Fault[] => {
  if (raw.x.length !== raw.y.length || raw.x.length === 0) {
    return [
      fault(raw, 'no-points', `${raw.x.length} abscissae and ${raw.y.length} ordinates`, 'export the spectrum again'),
    ]
  }
  for (const x of raw.x) {
    const nm = nominalNm(x, raw.xUnit)
    if (!(nm >= REACH_NM[0] && nm <= REACH_NM[1])) {
      const what = `${x} ${raw.xUnit} is no wavelength between ${REACH_NM[0]} nm and ${REACH_NM[1] / 1000} µm`
      return [fault(raw, 'axis-out-of-reach', what, 'check the unit of the axis and set `reading: { x: … }`')]
    }
  }
  return []
}

const scaleFaults = (y: Float64Array, kind: string): readonly Fault[] => {
  const largest = y.reduce((most, v) => (Number.isFinite(v) ? Math.max(most, v) : most), -Infinity)
  if (!(kind === 'transmittance' || kind === 'reflectance') || largest <= 2) return []
  return [
    {
      code: 'ordinate-scale',
      place: { at: kind },
      what: `${kind} reaches ${largest}, which a fraction of 1 cannot`,
      remedy: `set \`reading: { y: percent-${kind} }\` if it is written in percent`,
    },
  ]
}

interface Points {
  readonly perCm: Float64Array
  readonly axis: Float64Array
  readonly rawY: Float64Array
}

const sorted = (raw: RawSpectrum, medium: 'air' | 'vacuum'): Points => {
  const all = raw.x.map((x) => vacuumPerCm(x, raw.xUnit, medium))
  const { x: axis, y: rawY } = raw
  if (ascends(all)) return { perCm: all, axis, rawY }
  const back = (from: Float64Array) => from.slice().reverse()
  if (ascends(back(all))) return { perCm: back(all), axis: back(axis), rawY: back(rawY) }
  const order = [...all.keys()].sort((a, b) => all[a]! - all[b]!)
  const pick = (from: Float64Array) => Float64Array.from(order, (i) => from[i]!)
  return { perCm: pick(all), axis: pick(axis), rawY: pick(rawY) }
}

const ascends = (x: Float64Array): boolean => x.every((value, i) => i === 0 || x[i - 1]! < value)

/** One abscissa twice: the same ordinate is a repeat and left out, another one a contradiction nobody here can settle. */
const withoutRepeats = (
  points: Points,
):
  | (Points & { readonly kind: 'unique'; readonly repeats: number })
  | { readonly kind: 'contradiction'; readonly fault: Fault } => {
  const { perCm, axis, rawY } = points
  const keep: number[] = []
  for (let i = 0; i < perCm.length; i++) {
    const last = keep.at(-1)
    if (last === undefined || perCm[i]! > perCm[last]!) {
      keep.push(i)
      continue
    }
    if (!Object.is(rawY[i], rawY[last])) {
      const what = `the abscissa ${axis[i]} stands twice, with the ordinates ${rawY[last]} and ${rawY[i]}`
      const remedy = 'export one value for each abscissa (two scans in one file belong in two columns)'
      return { kind: 'contradiction', fault: { code: 'duplicate-abscissa', place: { at: 'axis' }, what, remedy } }
    }
  }
  if (keep.length === perCm.length) return { kind: 'unique', perCm, axis, rawY, repeats: 0 }
  const pick = (from: Float64Array) => Float64Array.from(keep, (i) => from[i]!)
  return { kind: 'unique', perCm: pick(perCm), axis: pick(axis), rawY: pick(rawY), repeats: perCm.length - keep.length }
}

const maskOf = (rawY: Float64Array, value: Float64Array, ordinate: Ordinate, limit: number) => {
  const mask = new Uint8Array(rawY.length)
  const saturated: number[] = []
  const missing: number[] = []
  for (let i = 0; i < rawY.length; i++) {
    if (ordinate.beyond(rawY[i]!) || value[i]! > limit) saturated.push(i)
    else if (Number.isNaN(value[i])) missing.push(i)
    else mask[i] = 1
  }
  return { mask, saturated, missing }
}

const medianStepNm = (axis: Float64Array, unit: AxisUnit): number => {
  if (axis.length < 2) return 1
  const nm = axis.map((x) => nominalNm(x, unit))
  const steps = nm
    .slice(1)
    .map((v, i) => Math.abs(v - nm[i]!))
    .sort()
  return steps[steps.length >> 1]!
}

const count = (n: number, noun: string): string => `${n} ${noun}${n === 1 ? '' : 's'}`

/** `345.27 to 348.52 nm` for runs, at most four of them named. */
const sayPlaces = (indices: readonly number[], axis: Float64Array, unit: AxisUnit): string => {
  const runs: [number, number][] = []
  for (const i of indices) {
    const run = runs.at(-1)
    if (run && run[1] === i - 1) run[1] = i
    else runs.push([i, i])
  }
  const shown = (v: number) => String(Number(v.toPrecision(7)))
  const texts = runs.slice(0, 4).map(([a, b]) => {
    const [low, high] = [axis[a]!, axis[b]!].sort((p, q) => p - q) as [number, number]
    return a === b ? shown(low) : `${shown(low)} to ${shown(high)}`
  })
  return `${texts.join(', ')}${runs.length > 4 ? ` and ${runs.length - 4} more` : ''} ${unit}`
}
