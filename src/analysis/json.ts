import type { AnalysedBand, Analysis } from './types.ts'

const rounded = (value: number | null | undefined, digits: number): number | null =>
  value === null || value === undefined || !Number.isFinite(value) ? null : Number(value.toFixed(digits))

const significant = (value: number | null | undefined): number | null =>
  value === null || value === undefined || !Number.isFinite(value) ? null : Number(value.toPrecision(6))

/** Height of what lies beyond the window (a charge-transfer flank) is extrapolated over decades: none is given. */
const heightJson = ({ positionPerCm, height }: AnalysedBand, window: readonly [number, number] | null) =>
  window !== null && (positionPerCm < window[0] || positionPerCm > window[1]) ? null : significant(height)

const bandJson = (band: AnalysedBand, window: readonly [number, number] | null) => ({
  role: band.role,
  term: band.term,
  position_cm1: rounded(band.positionPerCm, 3),
  u_position_cm1: rounded(band.uPositionPerCm, 3),
  u_model_cm1: rounded(band.uModelPerCm, 3),
  maximum_cm1: rounded(band.maximumPerCm, 3),
  u_maximum_cm1: rounded(band.uMaximumPerCm, 3),
  maximum_nm: rounded(band.maximumNm, 4),
  width_cm1: rounded(band.widthPerCm, 3),
  u_width_cm1: rounded(band.uWidthPerCm, 3),
  height: heightJson(band, window),
  u_height: significant(band.uHeight),
})

/** An analysis as the contract's `fit --json` shows it, without the file's and the sample's part. */
export const analysisJson = (analysis: Analysis) => {
  const { fit, ligandField: field } = analysis
  return {
    points: fit.points,
    window_cm1: fit.windowPerCm === null ? null : fit.windowPerCm.map((edge) => rounded(edge, 3)),
    bands: analysis.bands.map((band) => bandJson(band, fit.windowPerCm)),
    ligand_field:
      field === null
        ? null
        : {
            ion: field.ion,
            d: field.d,
            geometry: field.geometry,
            spin: field.spin,
            bands_used: field.bandsUsed,
            delta_cm1: rounded(field.deltaPerCm, 3),
            u_delta_cm1: rounded(field.uDeltaPerCm, 3),
            b_cm1: rounded(field.bPerCm, 3),
            u_b_cm1: rounded(field.uBPerCm, 3),
            c_cm1: rounded(field.cPerCm, 3),
            u_c_cm1: rounded(field.uCPerCm, 3),
            beta: rounded(field.beta, 4),
            beta_free_ion_b_cm1: rounded(field.betaFreeIonBPerCm, 1),
            dq_over_b: rounded(field.dqOverB, 4),
            correlation_delta_b: rounded(field.correlationDeltaB, 4),
            chi2: significant(field.chi2),
            degrees_of_freedom: field.degreesOfFreedom,
          },
    fit:
      fit.kind === 'unfitted'
        ? null
        : {
            recipe: fit.recipe.name,
            rms: significant(fit.rms),
            noise: significant(fit.noise),
            reduced_chi2: significant(fit.reducedChi2),
            components: fit.components.length,
            iterations: fit.iterations,
            stopped: fit.stopped,
            signal_to_noise: significant(fit.quality.signalToNoise),
            runs_z: rounded(fit.quality.runsZ, 2),
            effective_points: rounded(fit.quality.effectivePoints, 1),
            condition: significant(fit.quality.condition),
            bounds_hit: fit.quality.boundsHit,
            lack_of_fit: significant(fit.quality.lackOfFit),
            verdict: fit.quality.verdict,
          },
    flags: analysis.flags,
    remarks: analysis.remarks,
  }
}
