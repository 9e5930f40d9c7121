/**
 * One quantity of a sample over time: a mark a spectrum with its standard uncertainty as a bar, the reference as a line
 * with its own uncertainty as a shade. Spectra on which a rule rang are filled diamonds, the others open circles.
 */
import { ACCENT, HAIRLINE, INK, PAPER, SHADE, SMALL_PX, SOFT_INK } from './look.ts'
import { linear, say, ticks, widened } from './scale.ts'
import { drawing, element, line, px, text } from './svg.ts'

export interface TrendPoint {
  /** Epoch ms. */
  readonly at: number
  readonly value: number
  /** Standard uncertainty; null: no bar. */
  readonly u: number | null
  /** A rule rang on it. */
  readonly rang: boolean
}

export interface TrendDrawing {
  readonly title: string
  /** As the axis says it: `ν1 / cm⁻¹`. */
  readonly quantity: string
  readonly points: readonly TrendPoint[]
  readonly reference: { readonly value: number; readonly u: number | null } | null
}

const WIDTH = 600
const HEIGHT = 236
const LEFT = 76
const RIGHT = WIDTH - 20
const TOP = 44
const BOTTOM = HEIGHT - 48
const DAY_MS = 86_400_000
const HOUR_MS = 3_600_000

/** The drawing as SVG; the same input gives the same text. */
export const trendPicture = ({ title, quantity, points, reference }: TrendDrawing): string => {
  const known = points.filter(({ value }) => Number.isFinite(value)).toSorted((a, b) => a.at - b.at)
  const first = known[0]
  if (first === undefined)
    return drawing(
      WIDTH,
      100,
      title,
      'no spectra yet',
      text(LEFT, 28, title, { 'font-size': 16 }) + text(LEFT, 60, 'No spectra yet.'),
    )
  const span = known.at(-1)!.at - first.at
  const [unitMs, unit] = span > 2 * DAY_MS ? [DAY_MS, 'days'] : [HOUR_MS, 'hours']
  const ends = [
    ...known.flatMap(({ value, u }) => [value - (u ?? 0), value + (u ?? 0)]),
    ...(reference === null ? [] : [reference.value - (reference.u ?? 0), reference.value + (reference.u ?? 0)]),
  ]
  const up = linear(...widened(Math.min(...ends), Math.max(...ends), 0.08), BOTTOM, TOP)
  const across = linear(...widened(0, span / unitMs, 0.03), LEFT, RIGHT)
  const begun = new Date(first.at).toISOString().slice(0, 16).replace('T', ' ')
  const body = [
    text(LEFT, 24, title, { 'font-size': 16 }),
    ...ticks(up.from, up.to, 5).map(
      (value) =>
        line(LEFT, up.place(value), RIGHT, up.place(value), { stroke: HAIRLINE, 'stroke-width': 0.6 }) +
        text(LEFT - 8, up.place(value) + 4, say(value), { 'text-anchor': 'end' }),
    ),
    text(0, 0, quantity, { transform: `translate(18 ${(TOP + BOTTOM) / 2}) rotate(-90)`, 'text-anchor': 'middle' }),
    line(LEFT, BOTTOM, RIGHT, BOTTOM, { stroke: INK, 'stroke-width': 0.8 }),
    ...ticks(across.from, across.to, 7)
      .filter((value) => value >= 0)
      .map(
        (value) =>
          line(across.place(value), BOTTOM, across.place(value), BOTTOM + 5, { stroke: INK, 'stroke-width': 0.8 }) +
          text(across.place(value), BOTTOM + 20, say(value), { 'text-anchor': 'middle' }),
      ),
    text(RIGHT, BOTTOM + 38, `${unit} since ${begun} UTC`, { 'text-anchor': 'end', 'font-size': SMALL_PX }),
    reference === null ? '' : referenceLine(reference, up.place),
    ...known.map((point) => mark(across.place((point.at - first.at) / unitMs), point, up.place)),
  ]
  return drawing(WIDTH, HEIGHT, title, describe(known, quantity, reference), body.join(''))
}

const referenceLine = (
  { value, u }: NonNullable<TrendDrawing['reference']>,
  place: (value: number) => number,
): string => {
  const shade =
    u === null
      ? ''
      : element('rect', {
          x: LEFT,
          y: place(value + u),
          width: RIGHT - LEFT,
          height: Math.max(0, place(value - u) - place(value + u)),
          fill: SHADE,
        })
  return (
    shade +
    line(LEFT, place(value), RIGHT, place(value), { stroke: SOFT_INK, 'stroke-width': 1, 'stroke-dasharray': '6 3' }) +
    text(LEFT + 6, place(value) - 5, 'reference', { 'font-size': SMALL_PX, 'font-style': 'italic', fill: SOFT_INK })
  )
}

const mark = (x: number, { value, u, rang }: TrendPoint, place: (value: number) => number): string => {
  const y = place(value)
  const bar =
    u === null ? '' : line(x, place(value - u), x, place(value + u), { stroke: rang ? ACCENT : INK, 'stroke-width': 1 })
  return (
    bar +
    (rang
      ? element('path', { d: `M${px(x)} ${px(y - 5)}l5 5l-5 5l-5 -5z`, fill: ACCENT })
      : element('circle', { cx: x, cy: y, r: 3, fill: PAPER, stroke: INK, 'stroke-width': 1.1 }))
  )
}

const describe = (points: readonly TrendPoint[], quantity: string, reference: TrendDrawing['reference']): string => {
  const [first, last] = [points[0]!, points.at(-1)!]
  const compared = reference === null ? '' : `; reference ${say(Number(reference.value.toPrecision(6)))}`
  const rang = points.filter((point) => point.rang).length
  return `${quantity}: ${points.length} spectra, from ${say(Number(first.value.toPrecision(6)))} to ${say(Number(last.value.toPrecision(6)))}${compared}; a rule rang on ${rang} of them`
}
