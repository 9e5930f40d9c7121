/** What is said about a fit beside its numbers. */
import type { Flag } from '../spectrum/types.ts'
import type { Minimum, Problem } from './leastSquares.ts'
import type { Ion, ParameterFit } from './types.ts'

/** 99 % quantiles of χ² for 1 to 5 degrees of freedom (standard table). */
const CHI2_99 = [6.635, 9.21, 11.345, 13.277, 15.086]

/** Largest relative distance between a band and the model. */
export const missOf = (p: readonly number[], { model, observed }: Problem): number => {
  const positions = new Float64Array(model.count)
  model.evaluate(p[0]!, p[1]!, p[2]!, positions, new Float64Array(model.count * 3))
  return Math.max(...observed.map((y, i) => Math.abs(y - positions[i]!) / y))
}

/** What a reader must know about the numbers; a flag where the contract has one. */
export const remarksOn = (
  ion: Ion,
  problem: Problem,
  fit: ParameterFit,
  best: Minimum,
  rival: Minimum | null,
  weighted: boolean,
  fromTable: boolean,
): readonly (readonly [Flag | null, string])[] => {
  const { bPerCm: b, uBPerCm: uB, deltaPerCm: delta, degreesOfFreedom: freedom } = fit
  const out: (readonly [Flag | null, string])[] = []
  if (!problem.free[1]) out.push(['single-band', `${fit.bandsUsed.join(', ')} gives Δ only: B needs a second band`])
  const openNames = ['Δ', 'B', 'C'].filter((_, k) => problem.free[k] && [delta, b, fit.cPerCm][k] === null)
  if (openNames.length > 0)
    out.push([
      'ill-conditioned',
      `${fit.bandsUsed.join(', ')} leave ${openNames.join(' and ')} open: another band is needed`,
    ])
  if (!weighted) out.push(['ill-conditioned', 'the band positions carry no usable covariance: bands weighed alike'])
  const stretch = weighted && freedom > 0 ? Math.sqrt(Math.max(1, best.chi2 / freedom)) : 1
  if (b !== null && uB !== null && uB > 0.05 * stretch * b)
    out.push([
      'ill-conditioned',
      `${fit.bandsUsed.join(', ')} hold B loosely, to ${((100 * uB) / b).toFixed(0)} %: another band would mend it`,
    ])
  if (fromTable)
    out.push([
      'c-from-table',
      `C/B = ${ion.cOverB} ± ${ion.uCOverB} taken from the table: a spin-forbidden band would fix it`,
    ])
  const limit = CHI2_99[Math.min(freedom, CHI2_99.length) - 1]
  if (weighted && limit !== undefined && best.chi2 > limit)
    out.push([
      'misfit',
      `the bands are missed by up to ${(100 * missOf(best.p, problem)).toFixed(1)} %, chi2/ν ${(best.chi2 / freedom).toFixed(1)}: the uncertainties are widened by its root`,
    ])
  if (rival !== null)
    out.push([
      'ambiguous-assignment',
      `the same bands also fit Δ ${rival.p[0].toFixed(0)}, B ${rival.p[1].toFixed(0)} cm^-1`,
    ])
  if (b !== null && ion.freeIonBPerCm !== null && b > 1.05 * ion.freeIonBPerCm && b - 2 * (uB ?? 0) > ion.freeIonBPerCm)
    out.push([
      'misfit',
      `B exceeds that of the free ion, ${ion.freeIonBPerCm} cm^-1: look at the assignment or the ion`,
    ])
  return out
}
