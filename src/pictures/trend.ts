/**
 * One quantity of a sample over time: a mark an occasion with its standard uncertainty as a bar, the reference as a line
 * with its own uncertainty as a shade, the limits at which a rule rings as dotted lines. Occasions on which it rang are
 * filled diamonds, the others open circles; the newest is written out. Lines are told apart by dashes, marks by shape.
 */
import { ACCENT, HAIRLINE, INK, PAPER, SHADE, SMALL_PX, SOFT_INK } from './look.ts'
import { linear, type Scale, say, ticks, widened } from './scale.ts'
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
  /** Values at which the rule rings. */
  readonly limits?: readonly number[]
}

/** The drawing, and what it shows in words for who cannot see it. */
export interface Picture {
  readonly svg: string
  readonly widthPx: number
  readonly description: string
}

const WIDTH = 620
const HEIGHT = 272
const LEFT = 78
/** Room for what is written beside the lines. */
const RIGHT = WIDTH - 96
const TOP = 58
const BOTTOM = HEIGHT - 52
const DAY_MS = 86_400_000
const HOUR_MS = 3_600_000
/** Least distance between two lines of writing. */
const LEADING = 14

/** The drawing as SVG; the same input gives the same text. */
export const trendPicture = (trend: TrendDrawing): string => drawTrend(trend).svg

export const drawTrend = ({ title, quantity, points, reference, limits = [] }: TrendDrawing): Picture => {
  const known = points.filter(({ value }) => Number.isFinite(value)).toSorted((a, b) => a.at - b.at)
  const [first, newest] = [known[0], known.at(-1)]
  if (first === undefined || newest === undefined) return nothing(title)
  const span = newest.at - first.at
  const [unitMs, unit] = span > 2 * DAY_MS ? [DAY_MS, 'days'] : [HOUR_MS, 'hours']
  const ends = [
    ...known.flatMap(({ value, u }) => [value - (u ?? 0), value + (u ?? 0)]),
    ...(reference === null ? [] : [reference.value - (reference.u ?? 0), reference.value + (reference.u ?? 0)]),
    ...limits,
  ]
  const up = linear(...widened(Math.min(...ends), Math.max(...ends), 0.08), BOTTOM, TOP)
  const across = linear(...widened(0, span / unitMs, 0.03), LEFT, RIGHT)
  const description = describe(known, quantity, reference, limits)
  const body = [
    text(LEFT, 24, title, { 'font-size': 16 }),
    text(LEFT, 43, quantity, { 'font-size': SMALL_PX, fill: SOFT_INK }),
    key(known.some(({ rang }) => rang)),
    ...axes(up, across),
    text(RIGHT, BOTTOM + 40, `${unit} since ${begunAt(first.at)} UTC`, {
      'text-anchor': 'end',
      'font-size': SMALL_PX,
      fill: SOFT_INK,
    }),
    reference === null ? '' : referenceLine(reference, up.place),
    ...limits.map((limit) => limitLine(limit, up.place)),
    ...known.map((point) => mark(across.place((point.at - first.at) / unitMs), point, up.place)),
    ...beside(newest, reference, limits, up.place),
  ]
  return { svg: drawing(WIDTH, HEIGHT, title, description, body.join('')), widthPx: WIDTH, description }
}

const nothing = (title: string): Picture => ({
  svg: drawing(
    WIDTH,
    100,
    title,
    'no spectra yet',
    text(LEFT, 28, title, { 'font-size': 16 }) + text(LEFT, 60, 'No spectra yet.'),
  ),
  widthPx: WIDTH,
  description: 'no spectra yet',
})

const begunAt = (ms: number): string => new Date(ms).toISOString().slice(0, 16).replace('T', ' ')

/** What the two marks mean, where both may be seen. */
const key = (anyRang: boolean): string =>
  anyRang
    ? element('path', { d: `M${RIGHT - 178} 34l4.5 4.5l-4.5 4.5l-4.5 -4.5z`, fill: ACCENT }) +
      text(RIGHT - 168, 43, 'the rule rang', { 'font-size': SMALL_PX }) +
      element('circle', { cx: RIGHT - 76, cy: 38.5, r: 3, fill: PAPER, stroke: INK, 'stroke-width': 1.1 }) +
      text(RIGHT - 68, 43, 'it did not', { 'font-size': SMALL_PX })
    : ''

/** Digits after the point that every one of these needs. */
const decimalsOf = (values: readonly number[]): number =>
  Math.min(9, Math.max(0, ...values.map((value) => (String(value).split('.')[1] ?? '').length)))

const axes = (up: Scale, across: Scale): readonly string[] => {
  const levels = ticks(up.from, up.to, 5)
  const decimals = decimalsOf(levels)
  return [
    ...levels.map(
      (value) =>
        line(LEFT, up.place(value), RIGHT, up.place(value), { stroke: HAIRLINE, 'stroke-width': 0.6 }) +
        text(LEFT - 8, up.place(value) + 4, value.toFixed(decimals).replace('-', '−'), { 'text-anchor': 'end' }),
    ),
    line(LEFT, BOTTOM, RIGHT, BOTTOM, { stroke: INK, 'stroke-width': 0.8 }),
    ...ticks(across.from, across.to, 7)
      .filter((value) => value >= 0)
      .map(
        (value) =>
          line(across.place(value), BOTTOM, across.place(value), BOTTOM + 5, { stroke: INK, 'stroke-width': 0.8 }) +
          text(across.place(value), BOTTOM + 20, say(value), { 'text-anchor': 'middle' }),
      ),
  ]
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
    line(LEFT, place(value), RIGHT, place(value), { stroke: SOFT_INK, 'stroke-width': 1, 'stroke-dasharray': '6 3' })
  )
}

const limitLine = (value: number, place: (value: number) => number): string =>
  line(LEFT, place(value), RIGHT, place(value), { stroke: ACCENT, 'stroke-width': 1, 'stroke-dasharray': '1.5 3' })

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

interface Note {
  readonly y: number
  readonly content: string
  readonly attributes: Readonly<Record<string, string | number>>
}

/** Names at the right end of the lines, and the newest value; they give way to each other, not to the lines. */
const beside = (
  newest: TrendPoint,
  reference: TrendDrawing['reference'],
  limits: readonly number[],
  place: (value: number) => number,
): readonly string[] => {
  const notes: readonly Note[] = [
    ...limits.map((limit) => ({ y: place(limit), content: 'rings beyond', attributes: { fill: ACCENT } })),
    ...(reference === null
      ? []
      : [{ y: place(reference.value), content: 'reference', attributes: { fill: SOFT_INK, 'font-style': 'italic' } }]),
    { y: place(newest.value), content: said(newest), attributes: { fill: INK, 'font-weight': 'bold' } },
  ].toSorted((a, b) => a.y - b.y)
  return spread(notes.map(({ y }) => y)).map((y, i) =>
    text(RIGHT + 8, y + 4, notes[i]!.content, { 'font-size': SMALL_PX, ...notes[i]!.attributes }),
  )
}

/** Ascending places pushed apart to the leading, within the drawing. */
const spread = (wanted: readonly number[]): readonly number[] => {
  const places: number[] = []
  for (const y of wanted) places.push(Math.max(y, (places.at(-1) ?? Number.NEGATIVE_INFINITY) + LEADING))
  for (let i = places.length - 1; i >= 0; i--)
    places[i] = Math.min(places[i]!, (places[i + 1] ?? BOTTOM + LEADING) - LEADING)
  return places
}

/** To the first digit of its uncertainty, else to five digits. */
const said = ({ value, u }: TrendPoint): string =>
  u === null || !(u > 0)
    ? say(Number(value.toPrecision(5)))
    : value.toFixed(Math.min(6, Math.max(0, -Math.floor(Math.log10(u))))).replace('-', '−')

const describe = (
  points: readonly TrendPoint[],
  quantity: string,
  reference: TrendDrawing['reference'],
  limits: readonly number[],
): string => {
  const [first, last] = [points[0]!, points.at(-1)!]
  const rounded = (value: number): string => say(Number(value.toPrecision(6)))
  const compared = reference === null ? '' : `; reference ${rounded(reference.value)}`
  const limited = limits.length === 0 ? '' : `; the rule rings beyond ${limits.map(rounded).join(' and ')}`
  const rang = points.filter((point) => point.rang).length
  return `${quantity}: ${points.length} occasions, from ${rounded(first.value)} to ${rounded(last.value)}${compared}${limited}; the rule rang on ${rang} of them`
}
