/** From bands with roles to what the least squares take: known roles in order, split bands drawn together. */
import type { Flag } from '../spectrum/types.ts'
import { type BandModel, bandModel } from './model.ts'
import type { TermScheme, Transition } from './terms.ts'

export interface Band {
  readonly role: string
  readonly positionPerCm: number
}

export interface Gathered {
  readonly transitions: readonly Transition[]
  readonly positionsPerCm: readonly number[]
  readonly covariancePerCm2: readonly (readonly number[])[]
  readonly flags: readonly Flag[]
  readonly remarks: readonly string[]
}

/** Weights of `nu1a`, `nu1b`: a T term leaves a pair (a) and a single (b), an E term two singles. */
export const splitWeights = (transition: Transition): readonly [a: number, b: number] =>
  transition.upper[0]!.irrep.startsWith('T') ? [2 / 3, 1 / 3] : [1 / 2, 1 / 2]

/** Which of the bands make the position of one transition, and with what weight; empty where none do. */
const sharesOf = (transition: Transition, roles: readonly string[]): readonly (readonly [number, number])[] => {
  const whole = roles.indexOf(transition.role)
  if (whole !== -1) return [[whole, 1]]
  const a = roles.indexOf(`${transition.role}a`)
  const b = roles.indexOf(`${transition.role}b`)
  if (a === -1 || b === -1) return []
  const [wa, wb] = splitWeights(transition)
  return [
    [a, wa],
    [b, wb],
  ]
}

/** Bands that the scheme knows; those it does not are named in `remarks`. */
export const gather = (
  scheme: TermScheme,
  bands: readonly Band[],
  covariance: readonly (readonly number[])[],
): Gathered => {
  const roles = bands.map(({ role }) => role)
  const used = scheme.transitions
    .map((transition) => ({ transition, shares: sharesOf(transition, roles) }))
    .filter(({ shares }) => shares.length > 0)
  const taken = new Set(used.flatMap(({ shares }) => shares.map(([i]) => i)))
  const idle = roles.filter((_, i) => !taken.has(i))
  const split = used.filter(({ shares }) => shares.length > 1)
  const remarks = [
    ...split.map(
      ({ transition: { role } }) =>
        `${role} is split by lower symmetry: the mean of ${role}a and ${role}b, weighted by degeneracy, stands for it`,
    ),
    ...(idle.length === 0
      ? []
      : [`${idle.join(', ')} not used: no such transition, its other half is missing, or the role comes twice`]),
  ]
  return {
    transitions: used.map(({ transition }) => transition),
    positionsPerCm: used.map(({ shares }) => shares.reduce((sum, [i, w]) => sum + w * bands[i]!.positionPerCm, 0)),
    covariancePerCm2: used.map(({ shares: left }) =>
      used.map(({ shares: right }) =>
        left.reduce(
          (sum, [i, wi]) => sum + right.reduce((inner, [j, wj]) => inner + wi * wj * covariance[i]![j]!, 0),
          0,
        ),
      ),
    ),
    flags: split.length > 0 ? ['split'] : [],
    remarks,
  }
}

/** What a set of roles depends on. */
export interface Dependence {
  readonly model: BandModel
  /** Whether Δ, B, C move any of the bands. */
  readonly on: readonly [boolean, boolean, boolean]
}

const models = new Map<string, Dependence>()

/** The model of these transitions, kept: its scan is worth keeping. */
export const dependenceOf = (scheme: TermScheme, transitions: readonly Transition[]): Dependence => {
  let key = `${scheme.d}${scheme.geometry}${scheme.spin}`
  for (const { role } of transitions) key += role
  const known = models.get(key)
  if (known !== undefined) return known
  const model = bandModel(scheme, transitions)
  const positions = new Float64Array(model.count)
  const derivatives = new Float64Array(model.count * 3)
  model.evaluate(17000, 700, 3100, positions, derivatives) // no symmetry of the problem is special to this point
  const moves = (k: number): boolean => transitions.some((_, i) => Math.abs(derivatives[i * 3 + k]!) > 1e-9)
  const made: Dependence = { model, on: [moves(0), moves(1), moves(2)] }
  models.set(key, made)
  return made
}
