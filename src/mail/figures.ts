import type { Evidence } from '../rules/types.ts'
import { oneLine } from './plain.ts'

/** One line of the letter's table, every cell as it is printed. */
export interface FigureRow {
  readonly quantity: string
  readonly before: string
  readonly now: string
  readonly change: string
}

const LABELS: Readonly<Record<string, string>> = {
  delta_o: 'Δo',
  b: 'Racah B',
  c: 'Racah C',
  beta: 'β',
  dq_over_b: 'Dq/B',
  area_ratio21: 'area ratio, second to first band',
  scatter: 'scatter',
  extent: 'part converted',
}

const NUMBERED: Readonly<Record<string, string>> = {
  nu: 'ν%',
  max: 'maximum %',
  width: 'width of band %',
  height: 'height of band %',
}

/** How the evidence of a common change is named: `common shift of nu1`. */
export const COMMON = 'common shift of '

/** `nu1` → `ν1`, `delta_o` → `Δo`; a name without a label stays as the rule writes it. */
export const labelOf = (name: string): string => {
  if (name.startsWith(COMMON)) return `${COMMON}${labelOf(name.slice(COMMON.length))}`
  const numbered = /^(nu|max|width|height)(\d)$/.exec(name)
  return numbered === null ? (LABELS[name] ?? oneLine(name, 60)) : NUMBERED[numbered[1]!]!.replace('%', numbered[2]!)
}

/** `cm^-1` → `cm⁻¹`; a plain number has no unit. */
export const sayUnit = (unit: string): string =>
  unit === '1' || unit === '' ? '' : ` ${oneLine(unit, 20).replace('^-1', '⁻¹')}`

/** Digits after the point that show two significant digits of the uncertainty (GUM 7.2.6). */
const decimalsFor = (u: number): number => Math.min(9, Math.max(0, 1 - Math.floor(Math.log10(u))))

/** `19531 ± 12 cm⁻¹`; without an uncertainty six significant digits; `not known` for null. */
export const sayMeasured = (value: number | null, u: number | null, unit: string): string => {
  if (value === null || !Number.isFinite(value)) return 'not known'
  if (u === null || !(u > 0) || !Number.isFinite(u)) return `${Number(value.toPrecision(6))}${sayUnit(unit)}`
  const decimals = decimalsFor(u)
  return `${value.toFixed(decimals)} ± ${u.toFixed(decimals)}${sayUnit(unit)}`
}

/** `+102 ± 13 cm⁻¹`, the uncertainties of both sides combined; null where one side is unknown. */
export const sayChange = (evidence: Evidence): string | null => {
  const { value, reference, u, uReference, unit } = evidence
  if (value === null || reference === null) return null
  const change = value - reference
  const uChange = u === null && uReference === null ? null : Math.hypot(u ?? 0, uReference ?? 0)
  const said = sayMeasured(change, uChange, unit)
  return change > 0 ? `+${said}` : said.replace(/^-/, '−')
}

export const figureRow = (evidence: Evidence): FigureRow => ({
  quantity: labelOf(evidence.name),
  before: sayMeasured(evidence.reference, evidence.uReference, evidence.unit),
  now: sayMeasured(evidence.value, evidence.u, evidence.unit),
  change: sayChange(evidence) ?? 'not known',
})
