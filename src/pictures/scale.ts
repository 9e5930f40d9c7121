/** From a value to a place on paper and the round values at which an axis is marked. */
export interface Scale {
  readonly from: number
  readonly to: number
  readonly place: (value: number) => number
}

/** Linear; `to` of the paper may lie before `from` (an upward axis). */
export const linear = (from: number, to: number, paperFrom: number, paperTo: number): Scale => ({
  from,
  to,
  place: (value) => paperFrom + ((value - from) / (to - from)) * (paperTo - paperFrom),
})

/** 1, 2 or 5 times a power of ten, so that about `count` steps cover the range. */
const roundStep = (span: number, count: number): number => {
  const raw = span / Math.max(1, count)
  const power = 10 ** Math.floor(Math.log10(raw))
  const lead = raw / power
  return (lead < 1.5 ? 1 : lead < 3.5 ? 2 : lead < 7.5 ? 5 : 10) * power
}

/** Round values inside the range, ascending. */
export const ticks = (from: number, to: number, count: number): readonly number[] => {
  const step = roundStep(Math.abs(to - from), count)
  const [low, high] = from < to ? [from, to] : [to, from]
  const first = Math.ceil(low / step - 1e-9)
  const last = Math.floor(high / step + 1e-9)
  return Array.from({ length: Math.max(0, last - first + 1) }, (_, i) => Number(((first + i) * step).toPrecision(12)))
}

/** The range widened by a part of itself on both sides; a range of nothing gets some room. */
export const widened = (from: number, to: number, part: number): readonly [number, number] => {
  const room = (to - from || Math.abs(from) || 1) * part
  return [from - room, to + room]
}

/** The value as an axis says it, with a true minus. */
export const say = (value: number): string => String(value).replace('-', '−')
