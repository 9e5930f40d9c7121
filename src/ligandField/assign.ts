/**
 * Which transition each observed band is. Every assignment of `hypotheses.ts` is weighed; the weight is a sum of log
 * odds, each a rule of thumb of the trade (common practice) put into a number:
 *
 *   misfit         −χ²/2, with 2 % of a position as the error of the model beside the fit's own
 *   B              β = B/B₀ is 0.70 ± 0.15; outside 0.45 to 1.05 hardly ever; a pair of bands that no Δ and B give is out
 *   Δ              within a factor 1.35 (k = 1) of what the ion's complexes usually have
 *   intensity      spin-forbidden bands are ten times fainter and narrow, bands of one spin alike within ten,
 *                  a two-electron band fainter by five
 *   completeness   an allowed band that should lie among the observed ones, or in the visible below them, is missed
 *   simplicity     a split, a forbidden or an unassigned band must earn its keep
 *   hint           what the species' description expects
 */
import type { Flag } from '../spectrum/types.ts'
import { type Band, dependenceOf, gather } from './gather.ts'
import { type Choice, type Hypothesis, hypotheses, isTriple } from './hypotheses.ts'
import { solveRoles } from './solve.ts'
import { type TermScheme, termScheme, usualSpin } from './terms.ts'
import type { AssignedBand, Assignment, Geometry, Ion, ObservedBand, ParameterFit, Spin } from './types.ts'

const MODEL_ERROR = 0.02
const FAINT = 0.3
/** Longest wavenumber range in which most instruments would have shown a missing band, cm⁻¹. */
const SEEN_ABOVE = 11500
const AMBIGUOUS = 0.1

const bell = (x: number): number => -(x * x) / 2

/** The best assignment of bands (ascending) with its probability among all, and the runner-up. Spin null: the usual one. */
export const assignBands = (
  ion: Ion,
  geometry: Geometry,
  spin: Spin | null,
  observed: readonly ObservedBand[],
): Assignment => {
  const scheme = termScheme(ion.d, geometry, spin ?? usualSpin(ion, geometry))
  if (scheme === null || observed.length === 0)
    return {
      bands: observed.map(() => ({ role: null, term: null })),
      probability: 0,
      runnerUp: null,
      flags: ['no-band'],
    }
  const tallest = Math.max(...observed.map(({ height }) => height))
  const faint = observed.map(({ height, hint }) => height < FAINT * tallest || hint?.startsWith('sf') === true)
  const weighed = weighAll(ion, scheme, observed, hypotheses(scheme, faint))
  const best = weighed[0]!
  const total = weighed.reduce((sum, { odds }) => sum + Math.exp(odds - best.odds), 0)
  const second = weighed[1]
  const secondProbability = second === undefined ? 0 : Math.exp(second.odds - best.odds) / total
  const close = second !== undefined && secondProbability > AMBIGUOUS
  return {
    bands: best.hypothesis.map(said),
    probability: 1 / total,
    runnerUp: close ? { bands: second.hypothesis.map(said), probability: secondProbability } : null,
    flags: flagsOf(scheme, best.hypothesis, close),
  }
}

const said = (choice: Choice | null): AssignedBand => ({ role: choice?.role ?? null, term: choice?.term ?? null })

const flagsOf = (scheme: TermScheme, hypothesis: Hypothesis, close: boolean): readonly Flag[] => {
  const flags: Flag[] = []
  if (hypothesis.every((choice) => choice === null)) flags.push('no-band')
  if (hypothesis.some((choice) => choice?.half != null)) flags.push('split')
  if (scheme.jahnTeller) flags.push('jahn-teller')
  if (close) flags.push('ambiguous-assignment')
  return flags
}

interface Weighed {
  readonly hypothesis: Hypothesis
  /** Log odds up to a constant. */
  readonly odds: number
}

/** What is less likely than the best by this much in log odds tells nothing. */
const NEGLIGIBLE = 7

/** The assignments that can be, likeliest first. What the parameters say only lowers odds: one that is far behind before they are solved stays so. */
const weighAll = (
  ion: Ion,
  scheme: TermScheme,
  observed: readonly ObservedBand[],
  all: readonly Hypothesis[],
): readonly Weighed[] => {
  const plain = all
    .map((hypothesis) => ({ hypothesis, odds: plainOdds(scheme, observed, hypothesis) }))
    .sort((a, b) => b.odds - a.odds)
  const weighed: Weighed[] = []
  let best = Number.NEGATIVE_INFINITY
  for (const { hypothesis, odds: most } of plain) {
    if (most < best - NEGLIGIBLE) break
    const odds = weigh(ion, scheme, observed, hypothesis, most)
    if (odds > Number.NEGATIVE_INFINITY) weighed.push({ hypothesis, odds })
    best = Math.max(best, odds)
  }
  return weighed.sort((a, b) => b.odds - a.odds)
}

const plainOdds = (scheme: TermScheme, observed: readonly ObservedBand[], hypothesis: Hypothesis): number =>
  intensity(scheme, observed, hypothesis) + simplicity(scheme, observed, hypothesis) + hinted(observed, hypothesis)

/** Log odds of one assignment, up to a constant; −∞ where it cannot be. */
const weigh = (
  ion: Ion,
  scheme: TermScheme,
  observed: readonly ObservedBand[],
  hypothesis: Hypothesis,
  plain: number,
): number => {
  const bands = hypothesis.flatMap((choice, i) =>
    choice === null ? [] : [{ role: choice.role, positionPerCm: observed[i]!.positionPerCm }],
  )
  if (bands.length === 0) return plain
  const covariance = bands.map(({ positionPerCm }, i) => {
    const own = observed.find((band) => band.positionPerCm === positionPerCm)!.uPositionPerCm
    return bands.map((_, j) => (i === j ? (MODEL_ERROR * positionPerCm) ** 2 + own * own : 0))
  })
  const fit = solveRoles(ion, scheme.geometry, scheme.spin, bands, covariance, false)
  if (fit.flags.includes('impossible-ratio')) return Number.NEGATIVE_INFINITY
  const field = plausible(ion, scheme, fit) + lone(ion, scheme, fit, bands)
  return plain - (fit.chi2 ?? 0) / 2 + field + complete(scheme, observed, hypothesis, fit)
}

const plausible = (ion: Ion, scheme: TermScheme, fit: ParameterFit): number => {
  let odds = 0
  if (fit.beta !== null) {
    const beyond = Math.max(0, fit.beta - 1.05, 0.45 - fit.beta)
    odds += bell((fit.beta - 0.7) / 0.15) + bell(beyond / 0.03)
  }
  const typical = ion.typicalDeltaPerCm
  if (typical != null && fit.deltaPerCm !== null) {
    const usual = scheme.geometry === 'tetrahedral' ? (4 / 9) * typical : typical
    odds += bell(Math.log(fit.deltaPerCm / usual) / Math.log(1.35))
  }
  return odds
}

/** A transition that fixes neither Δ nor B is held against where it lies at the usual Δ and B = 0.8 B₀. */
const lone = (ion: Ion, scheme: TermScheme, fit: ParameterFit, bands: readonly Band[]): number => {
  const typical = ion.typicalDeltaPerCm
  if (fit.deltaPerCm !== null || fit.bPerCm !== null) return 0
  if (typical == null || ion.freeIonBPerCm === null) return -3
  const { transitions, positionsPerCm } = gather(
    scheme,
    bands,
    bands.map(() => bands.map(() => 0)),
  )
  if (transitions.length === 0) return -3
  const { model } = dependenceOf(scheme, transitions)
  const at = new Float64Array(model.count)
  const b = 0.8 * ion.freeIonBPerCm
  const delta = scheme.geometry === 'tetrahedral' ? (4 / 9) * typical : typical
  model.evaluate(delta, b, ion.cOverB * b, at, new Float64Array(model.count * 3))
  return bell(Math.log(positionsPerCm[0]! / at[0]!) / 0.2) - 0.5
}

const isTwoElectron = (scheme: TermScheme, role: string): boolean => scheme.ground.irrep === 'T1' && role === 'nu2'

const intensity = (scheme: TermScheme, observed: readonly ObservedBand[], hypothesis: Hypothesis): number => {
  const allowed = observed.filter((_, i) => hypothesis[i]?.role.startsWith('nu') === true)
  const tallest = Math.max(...(allowed.length > 0 ? allowed : observed).map(({ height }) => height))
  return hypothesis.reduce((odds, choice, i) => {
    if (choice === null) return odds
    const { height, widthPerCm } = observed[i]!
    const below = Math.log10(Math.max(tallest, 1e-12) / Math.max(height, 1e-12))
    if (choice.role.startsWith('sf')) return odds + bell(Math.max(0, 1 - below) / 0.5) - (widthPerCm > 2500 ? 1.5 : 0)
    if (isTwoElectron(scheme, choice.role)) return odds + bell((below - 0.7) / 0.6)
    return odds + bell(Math.max(0, below - 1) / 0.4)
  }, 0)
}

/** Below charge transfer there is little but d–d bands: only the last one, above all if strong, is easily left out. */
const unassigned = (observed: readonly ObservedBand[], i: number): number => {
  const tallest = Math.max(...observed.map(({ height }) => height))
  if (i < observed.length - 1) return observed[i]!.height < 0.05 * tallest ? 2.5 : 4
  return i > 0 && observed[i]!.height > 3 * observed[i - 1]!.height ? 1 : 3
}

const simplicity = (scheme: TermScheme, observed: readonly ObservedBand[], hypothesis: Hypothesis): number => {
  let odds = 0
  hypothesis.forEach((choice, i) => {
    if (choice === null) odds -= unassigned(observed, i)
    // a higher spin-forbidden band without the lower ones is the less likely
    else if (choice.role.startsWith('sf')) odds -= 1 + 0.7 * Number(choice.role.slice(2))
  })
  const a = hypothesis.findIndex((choice) => choice?.half === 'a')
  const b = hypothesis.findIndex((choice) => choice?.half === 'b')
  if (a === -1 || b === -1) return odds
  const [pair, single] = [observed[a]!, observed[b]!]
  const areas = Math.log((pair.height * pair.widthPerCm) / (single.height * single.widthPerCm))
  const { transition } = hypothesis[a]!
  const apart = Math.abs(pair.positionPerCm - single.positionPerCm)
  odds += bell((areas - (isTriple(transition) ? Math.LN2 : 0)) / 1.2) + bell(apart / 5000)
  // seldom is any but the first band seen to be split
  return odds - (scheme.jahnTeller ? 0.5 : 1.7) - (transition.role === 'nu1' ? 0 : 1.5) - (a > b ? 1 : 0)
}

const hinted = (observed: readonly ObservedBand[], hypothesis: Hypothesis): number =>
  hypothesis.reduce((odds, choice, i) => {
    const { hint } = observed[i]!
    if (hint === null) return odds
    if (choice?.role === hint) return odds + 5
    return choice !== null && choice.transition.role === hint ? odds + 1 : odds - 3
  }, 0)

/** Bands that the parameters demand where they would have been seen. */
const complete = (
  scheme: TermScheme,
  observed: readonly ObservedBand[],
  hypothesis: Hypothesis,
  fit: ParameterFit,
): number => {
  const { deltaPerCm: delta, bPerCm: b } = fit
  if (delta === null || (b === null && scheme.ground.irrep !== 'A2')) return 0
  const absent = scheme.transitions.filter(
    ({ role, allowed }) =>
      allowed && role.startsWith('nu') && !hypothesis.some((choice) => choice?.transition.role === role),
  )
  if (absent.length === 0 || b === null) return 0
  const { model } = dependenceOf(scheme, absent)
  const positions = new Float64Array(model.count)
  model.evaluate(delta, b, fit.cPerCm ?? 4.5 * b, positions, new Float64Array(model.count * 3))
  const lowest = observed[0]!.positionPerCm
  const highest = observed.at(-1)!.positionPerCm
  return absent.reduce((odds, { role }, i) => {
    const at = positions[i]!
    const hidden = observed.some((band) => Math.abs(band.positionPerCm - at) < band.widthPerCm / 3)
    const seen = at > Math.min(lowest, SEEN_ABOVE) && at < highest
    return odds - (seen && !hidden ? (isTwoElectron(scheme, role) ? 0.7 : 2.5) : 0)
  }, 0)
}
