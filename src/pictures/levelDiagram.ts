/**
 * E/B against Δ/B for dⁿ, drawn for paper: ink and grey only. Levels of the ground term's spin are full and strong,
 * others thin and broken; a change of the ground term is a dotted upright; the asked Δ/B, if any, a fine line with marks.
 */
import { crossovers, type Level, levels } from '../ligandField/index.ts'
import type { Geometry } from '../ligandField/types.ts'

export interface LevelDiagram {
  readonly ion: string
  readonly d: number
  readonly geometry: Geometry
  readonly cOverB: number
  /** Right end of the axis. */
  readonly upToDeltaOverB: number
  /** A Δ/B to mark. */
  readonly markDeltaOverB: number | null
}

const WIDTH = 760
const HEIGHT = 620
const LEFT = 62
const RIGHT = 650
const TOP = 54
const BOTTOM = 560
const INK = '#1c2329'
const GREY = '#7b858d'
const STEPS = 160
const LINE_HEIGHT = 12.5

interface Axes {
  readonly x: (deltaOverB: number) => number
  readonly y: (eOverB: number) => number
  readonly top: number
}

const at = (x: number): string => x.toFixed(2)

/** The whole picture as an SVG document. Δ/B and C/B must be positive and finite. */
export const levelDiagram = (diagram: LevelDiagram): string => {
  const { ion, d, geometry, cOverB, upToDeltaOverB: upTo, markDeltaOverB } = diagram
  const changes = crossovers(d, geometry, cOverB, upTo)
  const sample = (x: number): readonly Level[] => levels(d, { geometry, deltaPerCm: x, bPerCm: 1, cPerCm: cOverB })
  const edges = [upTo / 1e6, ...changes.map(({ deltaOverB }) => deltaOverB), upTo]
  const regions = edges.slice(1).map((end, i) => regionOf(sample, edges[i]!, end, upTo))
  const top = heightOf(regions, sample(upTo))
  const axes: Axes = {
    x: (value) => LEFT + (value / upTo) * (RIGHT - LEFT),
    y: (value) => BOTTOM - (value / top) * (BOTTOM - TOP),
    top,
  }
  const title = `${ion}, d${d}, ${geometry}: E/B against Δ/B, C/B = ${Number(cOverB.toFixed(3))}`
  return [
    `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${WIDTH} ${HEIGHT}" width="${WIDTH}" height="${HEIGHT}" font-family="sans-serif" font-size="11" fill="${INK}">`,
    `<title>${escaped(title)}</title>`,
    `<rect width="${WIDTH}" height="${HEIGHT}" fill="#ffffff"/>`,
    `<text x="${LEFT}" y="24" font-size="14">${escaped(title)}</text>`,
    `<text x="${LEFT}" y="41" fill="${GREY}">full: same spin as the ground term; broken: another spin</text>`,
    frame(axes, upTo),
    `<clipPath id="inside"><rect x="${LEFT}" y="${TOP}" width="${RIGHT - LEFT}" height="${BOTTOM - TOP + 2}"/></clipPath>`,
    '<g clip-path="url(#inside)" fill="none" stroke-linejoin="round">',
    ...regions.flatMap((region) => curves(region, axes)),
    '</g>',
    ...changes.map(({ deltaOverB, from, to }) => change(axes, deltaOverB, from, to)),
    ...(markDeltaOverB === null ? [] : [mark(axes, markDeltaOverB, sample(markDeltaOverB))]),
    ...names(sample(upTo), axes),
    '</svg>',
    '',
  ].join('\n')
}

const escaped = (text: string): string => text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;')

/** One stretch of Δ/B with one ground term: every level's course. */
interface Region {
  readonly groundMultiplicity: number
  readonly places: readonly number[]
  readonly courses: readonly { readonly multiplicity: number; readonly energies: readonly number[] }[]
}

const regionOf = (sample: (x: number) => readonly Level[], from: number, to: number, upTo: number): Region => {
  const count = Math.max(2, Math.ceil((STEPS * (to - from)) / upTo))
  const places = Array.from({ length: count + 1 }, (_, i) => from + ((to - from) * i) / count)
  const courses = new Map<string, { readonly multiplicity: number; readonly energies: number[] }>()
  for (const place of places)
    for (const { label, index, multiplicity, energyPerCm } of sample(place)) {
      const key = `${label} ${index}`
      const course = courses.get(key) ?? { multiplicity, energies: [] }
      course.energies.push(energyPerCm)
      courses.set(key, course)
    }
  const groundMultiplicity = sample((from + to) / 2)[0]!.multiplicity
  return { groundMultiplicity, places, courses: [...courses.values()] }
}

/** High enough for every level of the ground's spin, and for the lowest others where there are none. */
const heightOf = (regions: readonly Region[], last: readonly Level[]): number => {
  const allowed = regions.flatMap(({ courses, groundMultiplicity }) =>
    courses.filter(({ multiplicity }) => multiplicity === groundMultiplicity).flatMap(({ energies }) => energies),
  )
  const fallback = last[Math.min(8, last.length - 1)]!.energyPerCm
  const wanted = Math.min(90, Math.max(...allowed, fallback, 1) * 1.05)
  const step = stepOf(wanted)
  return Math.ceil(wanted / step) * step
}

/** 1, 2 or 5 times a power of ten, for about eight divisions. */
const stepOf = (range: number): number => {
  const power = 10 ** Math.floor(Math.log10(range / 8))
  const digit = range / 8 / power
  return power * (digit > 5 ? 10 : digit > 2 ? 5 : digit > 1 ? 2 : 1)
}

const ticks = (range: number): readonly number[] => {
  const step = stepOf(range)
  return Array.from({ length: Math.floor(range / step + 1e-9) + 1 }, (_, i) => Number((i * step).toPrecision(8)))
}

const frame = ({ x, y, top }: Axes, upTo: number): string => {
  const across = ticks(top).map(
    (value) =>
      `<line x1="${LEFT - 4}" x2="${LEFT}" y1="${at(y(value))}" y2="${at(y(value))}"/><text x="${LEFT - 8}" y="${at(y(value) + 4)}" text-anchor="end" fill="${INK}" stroke="none">${value}</text>`,
  )
  const along = ticks(upTo).map(
    (value) =>
      `<line x1="${at(x(value))}" x2="${at(x(value))}" y1="${BOTTOM}" y2="${BOTTOM + 4}"/><text x="${at(x(value))}" y="${BOTTOM + 17}" text-anchor="middle" fill="${INK}" stroke="none">${value}</text>`,
  )
  return [
    `<g stroke="${INK}" stroke-width="0.8" fill="none">`,
    `<path d="M${LEFT} ${TOP}V${BOTTOM}H${RIGHT}"/>`,
    ...across,
    ...along,
    '</g>',
    `<text x="${(LEFT + RIGHT) / 2}" y="${BOTTOM + 40}" text-anchor="middle">Δ/B</text>`,
    `<text transform="translate(20 ${(TOP + BOTTOM) / 2}) rotate(-90)" text-anchor="middle">E/B</text>`,
  ].join('\n')
}

const curves = ({ places, courses, groundMultiplicity }: Region, { x, y, top }: Axes): readonly string[] =>
  courses
    .filter(({ energies }) => Math.min(...energies) <= top)
    .map(({ multiplicity, energies }) => {
      const path = energies.map((e, i) => `${i === 0 ? 'M' : 'L'}${at(x(places[i]!))} ${at(y(e))}`).join('')
      const stroke =
        multiplicity === groundMultiplicity
          ? `stroke="${INK}" stroke-width="1.9"`
          : `stroke="${GREY}" stroke-width="0.9" stroke-dasharray="5 3"`
      return `<path d="${path}" ${stroke}/>`
    })

const change = ({ x }: Axes, deltaOverB: number, from: string, to: string): string => {
  const place = at(x(deltaOverB))
  return [
    `<line x1="${place}" x2="${place}" y1="${TOP}" y2="${BOTTOM}" stroke="${INK}" stroke-width="1.2" stroke-dasharray="1.5 4" stroke-linecap="round"/>`,
    `<text x="${place}" y="${BOTTOM + 29}" text-anchor="middle">${symbol(from)} → ${symbol(to)} at ${deltaOverB.toFixed(2)}</text>`,
  ].join('\n')
}

const mark = ({ x, y, top }: Axes, deltaOverB: number, there: readonly Level[]): string => {
  const place = at(x(deltaOverB))
  const ground = there[0]!.multiplicity
  const rings = there
    .filter(({ multiplicity, energyPerCm }) => multiplicity === ground && energyPerCm > 0 && energyPerCm <= top)
    .map(
      ({ energyPerCm }) => `<circle cx="${place}" cy="${at(y(energyPerCm))}" r="3.4" fill="#ffffff" stroke="${INK}"/>`,
    )
  return [
    `<line x1="${place}" x2="${place}" y1="${TOP}" y2="${BOTTOM}" stroke="${INK}" stroke-width="0.6"/>`,
    `<text x="${place}" y="${TOP - 3}" text-anchor="middle">${deltaOverB.toFixed(2)}</text>`,
    ...rings,
  ].join('\n')
}

/** `4T2g` with the multiplicity raised and the rest of the irrep lowered. */
const symbol = (label: string): string => {
  const [, multiplicity, letter, rest] = /^(\d)(.)(.*)$/.exec(label)!
  const raised = `<tspan font-size="8" dy="-4">${multiplicity}</tspan><tspan dy="4">${letter}</tspan>`
  return rest === '' ? raised : `${raised}<tspan font-size="8" dy="2.5">${rest}</tspan><tspan dy="-2.5">&#8203;</tspan>`
}

/** Names at the right end, allowed and forbidden in a column each, pushed apart where levels lie close. */
const names = (last: readonly Level[], axes: Axes): readonly string[] => {
  const shown = last.filter(({ energyPerCm }) => energyPerCm <= axes.top)
  const isAllowed = ({ multiplicity }: Level): boolean => multiplicity === last[0]!.multiplicity
  return [
    ...column(shown.filter(isAllowed), axes, RIGHT + 20, true),
    ...column(
      shown.filter((level) => !isAllowed(level)),
      axes,
      RIGHT + 64,
      false,
    ),
  ]
}

/** One column of names, each tied to its level by a hair line. */
const column = (shown: readonly Level[], { y }: Axes, left: number, strong: boolean): readonly string[] => {
  const places = spread(shown.map(({ energyPerCm }) => y(energyPerCm)))
  return shown.map(({ label, energyPerCm }, i) => {
    const place = places[i]!
    const weight = strong ? ' font-weight="bold"' : ''
    return [
      `<path d="M${RIGHT} ${at(y(energyPerCm))}L${RIGHT + 14} ${at(place)}H${left - 2}" stroke="${GREY}" stroke-width="0.5" fill="none"/>`,
      `<text x="${left}" y="${at(place + 4)}"${weight}>${symbol(label)}</text>`,
    ].join('')
  })
}

/** Places at least a line apart, as near to the wanted ones (descending in y) as that allows: clusters share the shift. */
const spread = (wanted: readonly number[]): readonly number[] => {
  const clusters: { sum: number; count: number }[] = []
  const topOf = ({ sum, count }: { sum: number; count: number }): number => sum / count
  for (const [i, y] of wanted.entries()) {
    // in shifted coordinates equal distances vanish: the problem is isotonic regression
    clusters.push({ sum: y + i * LINE_HEIGHT, count: 1 })
    while (clusters.length > 1 && topOf(clusters.at(-1)!) > topOf(clusters.at(-2)!)) {
      const last = clusters.pop()!
      const before = clusters.at(-1)!
      before.sum += last.sum
      before.count += last.count
    }
  }
  let i = 0
  return clusters.flatMap((cluster) =>
    Array.from({ length: cluster.count }, () => {
      const place = topOf(cluster) - i * LINE_HEIGHT
      i += 1
      return place
    }),
  )
}
