/**
 * A spectrum and what the fit makes of it: the measured curve, the fitted one, its parts, the background; below, what is
 * left over, with the noise as a shade. Vacuum wavenumbers run along the bottom, wavelengths along the top.
 */
import { evaluateFit } from '../bands/evaluateFit.ts'
import type { BandFit } from '../bands/types.ts'
import { nmOfWavenumber, wavenumberOfNm } from '../spectrum/index.ts'
import type { Spectrum } from '../spectrum/types.ts'
import { ACCENT, DASHES, HAIRLINE, INK, SHADE, SMALL_PX, SOFT_INK } from './look.ts'
import { linear, type Scale, say, ticks, widened } from './scale.ts'
import { drawing, element, line, path, px, text } from './svg.ts'

export interface SpectrumDrawing {
  readonly spectrum: Spectrum
  readonly fit: BandFit
  readonly title: string
  /** One per component of the fit, such as `nu1`; a component without a role is labelled by its position alone. */
  readonly roles?: readonly (string | null)[]
}

const WIDTH = 760
const HEIGHT = 590
const LEFT = 72
const RIGHT = WIDTH - 24
const TOP = 84
const BOTTOM = 396
const REST_TOP = 424
const REST_BOTTOM = 506

type Fitted = Extract<BandFit, { kind: 'fitted' }>

/** The drawing as SVG; the same input gives the same text. A spectrum without a fit is drawn with the reason. */
export const spectrumPicture = (picture: SpectrumDrawing): string => {
  const { spectrum, fit, title } = picture
  const { wavenumberPerCm: x } = spectrum
  if (x.length < 2) return drawing(WIDTH, 120, title, 'no data', text(LEFT, 60, 'The spectrum holds no data.'))
  const across = linear(x[0]!, x.at(-1)!, LEFT, RIGHT)
  const up = held(linear(...rangeOf(spectrum), BOTTOM, TOP))
  const fitted = fit.kind === 'fitted' ? fit : null
  const body = [
    text(LEFT, 28, title, { 'font-size': 17 }),
    text(LEFT, 44, subtitleOf(spectrum, fit), { 'font-size': SMALL_PX, fill: SOFT_INK }),
    wavelengthAxis(across, spectrum),
    wavenumberAxis(across, fitted === null ? BOTTOM : REST_BOTTOM),
    valueAxis(up, spectrum.ordinate === 'absorbance' ? 'absorbance' : 'Kubelka–Munk function'),
    fitted === null ? '' : partsOf(fitted, picture, across, up),
    dataOf(spectrum, across, up),
    fitted === null ? '' : totalOf(fitted, spectrum, across, up),
    fitted === null ? '' : restOf(fitted, spectrum, across),
    keyOf(fitted !== null, fitted === null ? BOTTOM : REST_BOTTOM),
  ]
  return drawing(WIDTH, HEIGHT, title, describe(spectrum, fit), body.join(''))
}

const finite = (values: Float64Array): readonly number[] => Array.from(values).filter(Number.isFinite)

/** The range of what is used: a spike would press the bands flat. Masked points beyond it stand at the edge. */
const rangeOf = ({ absorbance, used }: Spectrum): readonly [number, number] => {
  const known = finite(absorbance.filter((_, i) => used[i] === 1))
  const shown = known.length > 0 ? known : finite(absorbance)
  return widened(Math.min(0, ...shown), Math.max(0, ...shown), 0.06)
}

const held = (scale: Scale): Scale => ({
  ...scale,
  place: (value) => scale.place(Math.min(Math.max(value, scale.from), scale.to)),
})

const unitOf = ({ ordinate }: Spectrum): string => (ordinate === 'absorbance' ? 'absorbance' : 'Kubelka–Munk function')

const subtitleOf = (spectrum: Spectrum, fit: BandFit): string =>
  fit.kind === 'fitted'
    ? `${fit.recipe.name}; residual ${fit.rms.toPrecision(2)}, noise ${fit.noise.toPrecision(2)} (${unitOf(spectrum)}, rms)`
    : `not fitted: ${fit.why}`

const describe = (spectrum: Spectrum, fit: BandFit): string => {
  const range = `${unitOf(spectrum)} from ${Math.round(spectrum.wavenumberPerCm[0]!)} to ${Math.round(spectrum.wavenumberPerCm.at(-1)!)} cm⁻¹`
  if (fit.kind !== 'fitted') return `${range}; not fitted: ${fit.why}`
  const bands = fit.components.map(
    ({ positionPerCm, height }) => `${Math.round(positionPerCm)} cm⁻¹, height ${height.toPrecision(3)}`,
  )
  return `${range}; components at ${bands.join('; ')}`
}

const tick = (x: number, y: number, dy: number, label: string): string =>
  line(x, y, x, y + dy, { stroke: INK, 'stroke-width': 0.8 }) +
  text(x, y + (dy > 0 ? 20 : -10), label, { 'text-anchor': 'middle' })

const wavenumberAxis = (across: Scale, bottom: number): string =>
  line(LEFT, bottom, RIGHT, bottom, { stroke: INK, 'stroke-width': 0.8 }) +
  ticks(across.from, across.to, 7)
    .map((value) => tick(across.place(value), bottom, 5, say(value)))
    .join('') +
  text(RIGHT, bottom + 38, 'vacuum wavenumber / cm⁻¹', { 'text-anchor': 'end' })

/** Room that the label of a wavelength needs, px. */
const LABEL_PX = 36
/** Labelled first are the roundest wavelengths, then others between them where there is room. nm */
const ROUNDNESS = [100, 50, 20, 10] as const

const wavelengthAxis = (across: Scale, { medium }: Spectrum): string => {
  const [shortest, longest] = [nmOfWavenumber(across.to, medium), nmOfWavenumber(across.from, medium)]
  const labelled = new Map<number, number>()
  for (const step of ROUNDNESS)
    for (let nm = Math.ceil(shortest / step) * step; nm <= longest; nm += step) {
      const at = across.place(wavenumberOfNm(nm, medium))
      if ([...labelled.values()].every((other) => Math.abs(other - at) >= LABEL_PX)) labelled.set(nm, at)
    }
  const name = `wavelength ${medium === 'air' ? 'in air' : 'in vacuum'} / nm`
  return (
    line(LEFT, TOP, RIGHT, TOP, { stroke: INK, 'stroke-width': 0.8 }) +
    [...labelled].map(([nm, at]) => tick(at, TOP, -5, say(nm))).join('') +
    text(RIGHT, 58, name, { 'text-anchor': 'end', 'font-size': SMALL_PX })
  )
}

const valueAxis = (up: Scale, name: string): string =>
  ticks(up.from, up.to, 6)
    .map(
      (value) =>
        line(LEFT, up.place(value), RIGHT, up.place(value), { stroke: HAIRLINE, 'stroke-width': 0.6 }) +
        text(LEFT - 8, up.place(value) + 4, say(value), { 'text-anchor': 'end' }),
    )
    .join('') +
  text(0, 0, name, { transform: `translate(20 ${(TOP + BOTTOM) / 2}) rotate(-90)`, 'text-anchor': 'middle' })

const polyline = (xs: Float64Array, ys: Float64Array, across: Scale, up: Scale) =>
  Array.from(xs, (x, i) => [across.place(x), up.place(ys[i]!)] as const)

const dataOf = ({ wavenumberPerCm, absorbance, used }: Spectrum, across: Scale, up: Scale): string => {
  const measured = path(polyline(wavenumberPerCm, absorbance, across, up), {
    stroke: HAIRLINE,
    'stroke-width': 3.4,
    'stroke-linejoin': 'round',
  })
  const masked = Array.from(wavenumberPerCm, (x, i) => [across.place(x), up.place(absorbance[i]!), used[i]!] as const)
    .filter(([, y, isUsed]) => isUsed === 0 && Number.isFinite(y))
    .map(([x, y]) => `M${px(x - 3)} ${px(y - 3)}l6 6m-6 0l6 -6`)
  return (
    measured +
    (masked.length === 0
      ? ''
      : element('path', { d: masked.join(''), stroke: ACCENT, fill: 'none', 'stroke-width': 1 }))
  )
}

const totalOf = (fit: Fitted, { wavenumberPerCm }: Spectrum, across: Scale, up: Scale): string => {
  const inside = insideWindow(fit, wavenumberPerCm)
  return path(polyline(inside, evaluateFit(fit, inside).total, across, up), { stroke: INK, 'stroke-width': 1.3 })
}

const insideWindow = ({ windowPerCm: [low, high] }: Fitted, xs: Float64Array): Float64Array =>
  xs.filter((x) => x >= low && x <= high)

/** Each component on the background, in a dash of its own, with its name at its top. */
const partsOf = (fit: Fitted, { spectrum, roles }: SpectrumDrawing, across: Scale, up: Scale): string => {
  const xs = insideWindow(fit, spectrum.wavenumberPerCm)
  const { components, background } = evaluateFit(fit, xs)
  const ground = path(polyline(xs, background, across, up), {
    stroke: SOFT_INK,
    'stroke-width': 1,
    'stroke-dasharray': '1 3',
  })
  const curves = components.map((part, i) => {
    const onGround = part.map((value, k) => value + background[k]!)
    return path(polyline(xs, onGround, across, up), {
      stroke: SOFT_INK,
      'stroke-width': 1.1,
      'stroke-dasharray': DASHES[i % DASHES.length]!,
    })
  })
  const labels = fit.components.map(({ positionPerCm }, i) => {
    const at = across.place(positionPerCm)
    if (at < LEFT || at > RIGHT) return ''
    const role = roles?.[i]?.replace(/^nu/, 'ν')
    const label = `${role === undefined ? '' : `${role}  `}${Math.round(positionPerCm)}`
    return (
      line(at, TOP, at, BOTTOM, { stroke: SOFT_INK, 'stroke-width': 0.6, 'stroke-dasharray': '1 2' }) +
      text(at + 5, BOTTOM - 8, label, { 'font-style': 'italic', 'font-size': SMALL_PX })
    )
  })
  return ground + curves.join('') + labels.join('')
}

/** What is left over, on its own scale, before the noise. */
const restOf = (fit: Fitted, spectrum: Spectrum, across: Scale): string => {
  const { wavenumberPerCm, absorbance, used } = spectrum
  const { total } = evaluateFit(fit, wavenumberPerCm)
  const [low, high] = fit.windowPerCm
  const rest = absorbance.map((a, i) =>
    used[i] === 1 && wavenumberPerCm[i]! >= low && wavenumberPerCm[i]! <= high ? a - total[i]! : Number.NaN,
  )
  const most = Math.max(3 * fit.noise, ...finite(rest).map(Math.abs)) * 1.1
  const up = linear(-most, most, REST_BOTTOM, REST_TOP)
  const marks = ticks(-most, most, 2).map((value) =>
    text(LEFT - 8, up.place(value) + 4, say(value), { 'text-anchor': 'end', 'font-size': SMALL_PX }),
  )
  return (
    element('rect', {
      x: LEFT,
      y: up.place(fit.noise),
      width: RIGHT - LEFT,
      height: up.place(-fit.noise) - up.place(fit.noise),
      fill: SHADE,
    }) +
    line(LEFT, up.place(0), RIGHT, up.place(0), { stroke: HAIRLINE, 'stroke-width': 0.8 }) +
    path(polyline(wavenumberPerCm, rest, across, up), { stroke: INK, 'stroke-width': 0.8 }) +
    marks.join('') +
    text(LEFT, REST_TOP - 8, 'measured less fitted; shaded: ± noise', { 'font-size': SMALL_PX, fill: SOFT_INK })
  )
}

const KEY = [
  'broad line: measured; thin line: fitted; dashed: components on the background;',
  'dotted: background; crosses: not used',
] as const
const KEY_WITHOUT_FIT = ['broad line: measured; crosses: not used'] as const

const keyOf = (hasFit: boolean, bottom: number): string =>
  (hasFit ? KEY : KEY_WITHOUT_FIT)
    .map((said, i) => text(LEFT, bottom + 57 + 15 * i, said, { 'font-size': SMALL_PX, fill: SOFT_INK }))
    .join('')
