/**
 * A made-up conversion in a measured spectrum. With the compound's own fitted bands b, each moved to where the product has
 * it, and a converted part x, absorbance becomes A + x Σ (b_product − b), the product taken to absorb as strongly as the
 * compound and as broadly. Noise, scatter and flanks stay those of the measurement; ordinates keep the file's own step.
 */
import { curveOf } from '../bands/shapes.ts'
import type { Recipe } from '../bands/types.ts'
import type { OrdinateKind, RawSpectrum } from '../readers/types.ts'
import { readingStep } from '../spectrum/noise.ts'
import { vacuumPerCm } from '../spectrum/units.ts'
import type { Move, Product } from './product.ts'

/** A fitted band. cm⁻¹, absorbance as measured. */
export interface FittedBand {
  readonly role: string | null
  readonly positionPerCm: number
  readonly widthPerCm: number
  readonly height: number | null
  /** Of the recipe's component. */
  readonly component: Recipe['components'][number]
}

interface MovedBand extends FittedBand {
  readonly height: number
  readonly toPerCm: number
}

/** The bands that move, with where to. The halves of a split band move together. */
export const movedBands = (
  bands: readonly FittedBand[],
  { moves }: Extract<Product, { kind: 'product' }>,
): readonly MovedBand[] =>
  bands.flatMap((band) => {
    const role = band.role?.replace(/[ab]$/, '')
    const move = role === undefined ? undefined : moves[role]
    if (band.height === null || move === undefined) return []
    const halves = bands.filter((other) => other.role?.replace(/[ab]$/, '') === role)
    const middle = halves.reduce((sum, { positionPerCm }) => sum + positionPerCm, 0) / halves.length
    return [{ ...band, height: band.height, toPerCm: band.positionPerCm + distance(move, middle) }]
  })

const distance = (move: Move, from: number): number => {
  if (move.kind === 'at') return move.perCm - from
  return move.kind === 'by' ? move.perCm : from * (move.factor - 1)
}

/** The spectrum with the part `part` (0 to 1) of the compound converted. */
export const withProduct = (
  raw: RawSpectrum,
  bands: readonly MovedBand[],
  part: number,
  { medium, y }: { readonly medium: 'air' | 'vacuum'; readonly y?: OrdinateKind },
): RawSpectrum => {
  const axis = raw.medium ?? (raw.xUnit === 'nm' || raw.xUnit === 'um' ? medium : 'vacuum')
  const step = readingStep(raw.y)
  const add = addingTo(y ?? raw.yKind)
  const changed = raw.y.map((value, i) => {
    if (!Number.isFinite(value)) return value
    const perCm = vacuumPerCm(raw.x[i]!, raw.xUnit, axis)
    const more =
      part *
      bands.reduce(
        (sum, band) => sum + heightAt(band, band.toPerCm, perCm) - heightAt(band, band.positionPerCm, perCm),
        0,
      )
    const sum = add(value, more)
    return step > 0 ? Math.round(sum / step) * step : sum
  })
  return { ...raw, y: changed }
}

const heightAt = (band: MovedBand, positionPerCm: number, perCm: number): number =>
  curveOf({ ...band, shape: band.component.shape, positionPerCm })(perCm)

/** How more absorbance (or Kubelka–Munk function) shows in an ordinate of this kind. */
const addingTo = (kind: OrdinateKind): ((value: number, more: number) => number) => {
  switch (kind) {
    case 'transmittance':
    case 'percent-transmittance':
      return (value, more) => (value > 0 ? value * 10 ** -more : value)
    case 'reflectance':
      return reflected(1)
    case 'percent-reflectance':
      return reflected(100)
    default:
      return (value, more) => value + more
  }
}

/** F = (1 − R)²/2R, continued oddly above R = 1, solved for R: R = 1 + F − √(F² + 2F), its inverse above 1. */
const reflected =
  (scale: number) =>
  (value: number, more: number): number => {
    const r = value / scale
    if (!(r > 0)) return value
    const f = (Math.sign(1 - r) * (1 - r) ** 2) / (2 * r) + more
    const inverse = 1 + Math.abs(f) - Math.sqrt(f * f + 2 * Math.abs(f))
    return scale * (f >= 0 ? inverse : 1 / inverse)
  }
