/**
 * From bands to Δ, B and C: which parameters the bands can fix, the minima, the choice among them, uncertainty.
 *
 * The covariance of the result is (Jᵀ V⁻¹ J)⁻¹, times χ²/ν where the model misses its bands by more than their
 * uncertainty (χ²/ν > 1). Where u(B) exceeds 2 % of B, half the profile interval replaces it.
 */
import type { Flag } from '../spectrum/types.ts'
import { eigensystem } from './eigen.ts'
import { type Band, type Dependence, dependenceOf, type Gathered, gather } from './gather.ts'
import { profileInterval } from './interval.ts'
import { type Minimum, minimaOf, type Problem, whitenerOf } from './leastSquares.ts'
import { missOf, remarksOn } from './remarks.ts'
import { hasTwoSpins, type TermScheme, termScheme, usualSpin } from './terms.ts'
import type { Geometry, Ion, ParameterFit, Spin } from './types.ts'

const KINDLY = 1e-6

/**
 * Δ, B (and C where the bands depend on it) of an ion from bands with roles. `covariancePerCm2` belongs to the
 * positions, in their order, errors common to several bands included. Numbers that the bands cannot give are null and a
 * flag and a remark say why; nothing throws.
 */
export const solveParameters = (
  ion: Ion,
  geometry: Geometry,
  spin: Spin | null,
  bands: readonly Band[],
  covariancePerCm2: readonly (readonly number[])[],
): ParameterFit => solveRoles(ion, geometry, spin, bands, covariancePerCm2, true)

/** As `solveParameters`; `withInterval` false spares the profile interval, which weighing many assignments does not need. */
export const solveRoles = (
  ion: Ion,
  geometry: Geometry,
  spin: Spin | null,
  bands: readonly Band[],
  covariancePerCm2: readonly (readonly number[])[],
  withInterval: boolean,
): ParameterFit => {
  const meant = spin ?? usualSpin(ion, geometry)
  const scheme = termScheme(ion.d, geometry, meant)
  if (scheme === null)
    return nothing(ion, geometry, meant, ['no-band'], [`no roles are defined for ${say(ion.d, geometry, meant)}`])
  const gathered = gather(scheme, bands, covariancePerCm2)
  const flags: Flag[] = [...gathered.flags]
  const remarks: string[] = [...gathered.remarks]
  if (scheme.jahnTeller) {
    flags.push('jahn-teller')
    remarks.push(`the ground term ${scheme.groundLabel} distorts, so that one Δ is only a mean`)
  }
  if (spin === null && hasTwoSpins(ion.d, geometry))
    remarks.push(`taken as ${meant} spin, which is usual for ${ion.symbol}`)
  const empty = nothing(ion, geometry, scheme.spin, flags, remarks)
  if (gathered.transitions.length === 0)
    return { ...empty, ...more(empty, 'no-band', 'no band with a role of this ion') }
  if (gathered.positionsPerCm.some((x) => !(x > 0 && Number.isFinite(x))))
    return { ...empty, ...more(empty, 'no-band', 'a band position is no positive wavenumber') }
  return solve(ion, scheme, gathered, empty, withInterval)
}

const say = (d: number, geometry: Geometry, spin: Spin | null): string =>
  `${spin === null ? '' : `${spin}-spin `}d${d} in a ${geometry} field`

const nothing = (
  ion: Ion,
  geometry: Geometry,
  spin: Spin | null,
  flags: readonly Flag[],
  remarks: readonly string[],
): ParameterFit => ({
  ion: ion.symbol,
  d: ion.d,
  geometry,
  spin,
  bandsUsed: [],
  deltaPerCm: null,
  uDeltaPerCm: null,
  bPerCm: null,
  uBPerCm: null,
  cPerCm: null,
  uCPerCm: null,
  beta: null,
  betaFreeIonBPerCm: ion.freeIonBPerCm,
  dqOverB: null,
  correlationDeltaB: null,
  chi2: null,
  degreesOfFreedom: 0,
  flags,
  remarks,
})

const more = (fit: ParameterFit, flag: Flag, remark: string): Pick<ParameterFit, 'flags' | 'remarks'> => ({
  flags: fit.flags.includes(flag) ? fit.flags : [...fit.flags, flag],
  remarks: [...fit.remarks, remark],
})

/** Least squares need as many bands as parameters; a prior on C/B counts as one where C matters. */
const solve = (
  ion: Ion,
  scheme: TermScheme,
  gathered: Gathered,
  empty: ParameterFit,
  withInterval: boolean,
): ParameterFit => {
  const { transitions, positionsPerCm, covariancePerCm2 } = gathered
  const dependence = dependenceOf(scheme, transitions)
  const [onDelta, onB, onC] = dependence.on
  const roles = transitions.map(({ role }) => role)
  const count = roles.length
  const wanted = (onDelta ? 1 : 0) + (onB ? 1 : 0)
  if (count < wanted)
    return {
      ...empty,
      ...more(empty, 'single-band', `${roles.join(', ')} alone fixes neither Δ nor B: a second band is needed`),
    }
  const whitener = whitenerOf(covariancePerCm2)
  const plain = whitener ?? whitenerOf(roles.map((_, i) => roles.map((_, j) => (i === j ? 1 : 0))))!
  const prior = onC && count < wanted + 1 ? { cOverB: ion.cOverB, uCOverB: ion.uCOverB } : null
  const base = { model: dependence.model, observed: positionsPerCm, whitener: plain, cOverB: ion.cOverB }
  const problem: Problem = { ...base, free: dependence.on, prior }
  const freedom = count - wanted - (onC && prior === null ? 1 : 0)
  const start = { ...empty, bandsUsed: roles, degreesOfFreedom: freedom }
  const minima = minimaOf(problem)
  const possible = minima.filter((minimum) => isPossible(minimum, problem, freedom))
  const impossible = onB ? possible.length === 0 : minima.length === 0
  if (impossible) return { ...start, ...more(start, 'impossible-ratio', sayImpossible(scheme, gathered)) }
  const ranked = rank(ion, dependence, onB ? possible : minima)
  return describe(ion, problem, ranked, whitener !== null, start, withInterval)
}

const sayImpossible = (scheme: TermScheme, { transitions, positionsPerCm }: Gathered): string => {
  const named = transitions.map(({ role }, i) => `${role} ${positionsPerCm[i]!.toFixed(0)}`).join(', ')
  return `no positive Δ and B of ${say(scheme.d, scheme.geometry, scheme.spin)} give ${named} cm^-1: look at the assignment, the ion or the geometry`
}

/** Without spare bands the minimum must meet them; with some it must at least lie inside the range of Δ/B. */
const isPossible = ({ p, chi2 }: Minimum, problem: Problem, freedom: number): boolean => {
  const [delta, b] = p
  if (problem.free[0] && !(b > 0 && delta / b > 0.05 && delta / b < 1500)) return false
  if (freedom > 0) return true
  if (problem.prior !== null) return chi2 < 9
  return missOf(p, problem) < KINDLY
}

/** B/B₀ of complexes lies around 0.75, spread 0.2, never much above 1 (common practice). */
const strangeness = (ion: Ion, b: number): number => {
  if (ion.freeIonBPerCm === null) return 0
  const beta = b / ion.freeIonBPerCm
  return ((beta - 0.75) / 0.2) ** 2 + (beta > 1.05 ? ((beta - 1.05) / 0.02) ** 2 : 0) + (beta < 0.2 ? 25 : 0)
}

interface Ranked {
  readonly best: Minimum
  /** Other minima, from the most to the least plausible, with how much worse they are (−2 log of a ratio of odds). */
  readonly others: readonly { readonly minimum: Minimum; readonly worse: number }[]
}

const rank = (ion: Ion, { on }: Dependence, minima: readonly Minimum[]): Ranked => {
  const least = minima[0]!.chi2
  const scored = minima
    .map((minimum) => ({ minimum, score: minimum.chi2 - least + (on[1] ? strangeness(ion, minimum.p[1]) : 0) }))
    .sort((a, b) => a.score - b.score)
  const [best, ...rest] = scored
  return {
    best: best!.minimum,
    others: rest.map(({ minimum, score }) => ({ minimum, worse: score - best!.score })),
  }
}

interface Spread {
  /** Covariance of Δ, B, C, rows first. */
  readonly covariance: Float64Array
  /** Which parameters the bands leave open. */
  readonly open: readonly boolean[]
}

/** Inverse of the normal matrix by its eigenvectors, scaled to a unit diagonal; directions without hold are left out. */
const spreadOf = (normal: Float64Array, free: readonly boolean[]): Spread => {
  const size = [0, 1, 2].map((k) => (free[k] && normal[k * 4]! > 0 ? Math.sqrt(normal[k * 4]!) : 0))
  const scaled = new Float64Array(9)
  const vectors = new Float64Array(9)
  for (let i = 0; i < 3; i += 1)
    for (let j = 0; j < 3; j += 1)
      scaled[i * 3 + j] = size[i]! * size[j]! === 0 ? (i === j ? 1 : 0) : normal[i * 3 + j]! / (size[i]! * size[j]!)
  eigensystem(scaled, 3, vectors)
  const covariance = new Float64Array(9)
  const open = size.map((x) => x === 0)
  for (let k = 0; k < 3; k += 1) {
    const value = scaled[k * 4]!
    for (let i = 0; i < 3; i += 1) {
      if (value < 1e-9 && Math.abs(vectors[k * 3 + i]!) > 1e-4) open[i] = true
      if (value < 1e-9 || size[i] === 0) continue
      for (let j = 0; j < 3; j += 1)
        if (size[j] !== 0)
          covariance[i * 3 + j]! += (vectors[k * 3 + i]! * vectors[k * 3 + j]!) / value / (size[i]! * size[j]!)
    }
  }
  return { covariance, open }
}

const LOOSE = 0.02

const describe = (
  ion: Ion,
  problem: Problem,
  { best, others }: Ranked,
  weighted: boolean,
  start: ParameterFit,
  withInterval: boolean,
): ParameterFit => {
  const { free, prior } = problem
  const freedom = start.degreesOfFreedom
  const reduced = freedom > 0 ? best.chi2 / freedom : 0
  const misfit = weighted ? Math.max(1, reduced) : reduced
  const { covariance, open } = spreadOf(best.normal, free)
  const known = (k: number): boolean => free[k]! && !open[k]
  const value = (k: 0 | 1 | 2): number | null => (known(k) ? best.p[k] : null)
  const linear = (k: number): number | null =>
    known(k) && (weighted || freedom > 0) ? Math.sqrt(covariance[k * 4]! * misfit) : null
  const uLinear = [linear(0), linear(1), linear(2)]
  const b = value(1)
  const loose = withInterval && b !== null && uLinear[1] !== null && uLinear[1]! > LOOSE * b
  const interval = loose ? profileInterval(problem, best, 1, uLinear[1]!, misfit) : null
  const uB =
    interval !== null && interval.low !== null && interval.high !== null
      ? (interval.high - interval.low) / 2
      : (uLinear[1] ?? null)
  const delta = value(0)
  const both = delta !== null && b !== null
  const rival = others.find(({ worse }) => worse < 6)
  const fit: ParameterFit = {
    ...start,
    deltaPerCm: delta,
    uDeltaPerCm: uLinear[0] ?? null,
    bPerCm: b,
    uBPerCm: uB,
    cPerCm: value(2),
    uCPerCm: uLinear[2] ?? null,
    beta: b === null || ion.freeIonBPerCm === null ? null : b / ion.freeIonBPerCm,
    dqOverB: both ? delta / 10 / b : null,
    correlationDeltaB: both && uB !== null ? covariance[1]! / Math.sqrt(covariance[0]! * covariance[4]!) : null,
    chi2: weighted ? best.chi2 : null,
    ...(interval === null ? {} : { intervalBPerCm: [interval.low, interval.high] as const }),
    ...(others.length === 0
      ? {}
      : { alternatives: others.map(({ minimum: { p } }) => ({ deltaPerCm: p[0], bPerCm: p[1], cPerCm: p[2] })) }),
  }
  const said = remarksOn(ion, problem, fit, best, rival?.minimum ?? null, weighted, prior !== null)
  return {
    ...fit,
    flags: [...new Set([...start.flags, ...said.map(([flag]) => flag)])].filter((flag) => flag !== null),
    remarks: [...start.remarks, ...said.map(([, remark]) => remark)],
  }
}
