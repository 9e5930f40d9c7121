import type { analysisJson } from '../analysis/index.ts'

type FitRow = ReturnType<typeof analysisJson> & {
  readonly file: string
  readonly index: number
  readonly sample: string | null
  readonly measured_at: string
}

/** `17402.1 ± 1.9`, or a dash where there is no number. */
const pm = (value: number | null, u: number | null, digits = 1): string =>
  value === null ? '–' : u === null ? value.toFixed(digits) : `${value.toFixed(digits)} ± ${u.toFixed(digits)}`

/** One fitted spectrum for a person to read. */
export const fitText = (row: FitRow): string => {
  const { ligand_field: field, fit } = row
  const head = `${row.file}${row.index > 0 ? ` [${row.index}]` : ''}  ${row.sample ?? 'no sample name'}  ${row.measured_at}`
  const bands = row.bands.map((band) => {
    const nm = band.maximum_nm === null ? 'no maximum of its own' : `maximum ${band.maximum_nm.toFixed(2)} nm`
    const name = band.role === null ? 'no d-d band' : `${band.role} ${band.term ?? ''}`
    const model = band.u_model_cm1 === null ? '' : ` (recipes ± ${band.u_model_cm1.toFixed(0)})`
    return `  ${name.padEnd(14)} ${pm(band.position_cm1, band.u_position_cm1)} cm⁻¹${model}, ${nm}, width ${pm(band.width_cm1, null, 0)} cm⁻¹, height ${band.height ?? '–'}`
  })
  const parameters =
    field === null
      ? ['  no ligand-field parameters']
      : [
          `  Δ = ${pm(field.delta_cm1, field.u_delta_cm1)} cm⁻¹   B = ${pm(field.b_cm1, field.u_b_cm1)} cm⁻¹   C = ${pm(field.c_cm1, field.u_c_cm1)} cm⁻¹`,
          `  β = ${field.beta === null ? '–' : `${field.beta.toFixed(3)} of the free ion's ${field.beta_free_ion_b_cm1} cm⁻¹`}   from ${field.bands_used.join(', ') || 'no band'} (${field.ion}, d${field.d}, ${field.geometry}${field.spin === null ? '' : `, ${field.spin} spin`})`,
        ]
  const quality =
    fit === null
      ? []
      : [
          `  ${fit.verdict}`,
          `  fit: ${fit.recipe}; rms ${fit.rms}, noise ${fit.noise}, reduced χ² ${fit.reduced_chi2}; ${fit.iterations} iterations, stopped by ${fit.stopped}`,
        ]
  const flags = row.flags.length === 0 ? [] : [`  flags: ${row.flags.join(', ')}`]
  return [head, ...bands, ...parameters, ...quality, ...flags, ...row.remarks.map((remark) => `  – ${remark}`)].join(
    '\n',
  )
}
