/**
 * What the dependent series of an AnIML spectrum is: absorbance, transmittance or reflectance. The technique definition for UV/Vis
 * has its pitfalls: label `A` maps to the ampere, and percent transmittance has the factor 1 where percent means 0.01.
 */
import type { UnitFlaw, WrittenUnit } from './animlUnits.ts'
import type { Element } from './animlXml.ts'
import type { OrdinateKind, ReadingHints } from './types.ts'
import { ordinateKind, ordinateWords, plainWords } from './words.ts'

type Quantity = 'absorbance' | 'transmittance' | 'reflectance' | 'kubelka-munk'

export type OrdinateReading =
  | {
      readonly kind: 'ordinate'
      readonly y: OrdinateKind
      readonly scale: number
      readonly offset: number
      /** Code and sentence of each thing to know. */
      readonly remarks: readonly (readonly [string, string])[]
    }
  /** Another quantity, such as a temperature beside the spectrum. */
  | { readonly kind: 'other'; readonly what: string }
  | UnitFlaw

interface LabelMeaning {
  readonly quantity: Quantity | null
  readonly percent: boolean
  readonly scale: number
}

const LABELS: readonly (readonly [RegExp, LabelMeaning])[] = [
  [/^(?:au|a\.u\.|a|abs|od|absorbance(?: units?)?)$/, { quantity: 'absorbance', percent: false, scale: 1 }],
  [/^(?:mau|mabs|mod)$/, { quantity: 'absorbance', percent: false, scale: 1e-3 }],
  [
    /^(?:percent ?t|% ?t|t ?%|percent transmittance|% transmittance)$/,
    { quantity: 'transmittance', percent: true, scale: 1 },
  ],
  [
    /^(?:percent ?r|% ?r|r ?%|percent reflectance|% reflectance)$/,
    { quantity: 'reflectance', percent: true, scale: 1 },
  ],
  [/^(?:t|transmittance)$/, { quantity: 'transmittance', percent: false, scale: 1 }],
  [/^(?:r|reflectance)$/, { quantity: 'reflectance', percent: false, scale: 1 }],
  [/^(?:%|percent)$/, { quantity: null, percent: true, scale: 1 }],
  [/^(?:|1|none|dimensionless|unitless)$/, { quantity: null, percent: false, scale: 1 }],
]

const same = (a: number, b: number) => Math.abs(a / b - 1) < 1e-6

/** What a dependent series holds, from its unit, its name and its largest value. */
export const ordinateOf = (
  series: Element,
  unit: WrittenUnit | null,
  largest: number,
  hints: ReadingHints,
): OrdinateReading => {
  const name = series.attributes.name ?? ''
  const at = unit?.element ?? series
  const flaw = (code: string, what: string, settle: readonly OrdinateKind[] = []): UnitFlaw => ({
    kind: 'flaw',
    code,
    offset: at.offset,
    what,
    remedy: 'say which with `reading: { y: … }`',
    settle: settle.map((y) => ({ y })),
  })
  const label = LABELS.find(([spelling]) => spelling.test(plainWords(unit?.label ?? '')))?.[1]
  // "Intensity" is what the technique definition calls every dependent series: it tells nothing
  const words = [name, unit?.quantity ?? ''].map((text) => ordinateWords(text.replace(/\bintensity\b/gi, '').trim()))
  const other = words.find(({ kind }) => kind === 'other' || kind === 'side')
  const dimension = unit?.si?.dimension ?? ''
  if (hints.y !== undefined && !other && (dimension === '' || dimension === 'A1'))
    return { kind: 'ordinate', y: hints.y, scale: label?.scale ?? 1, offset: 0, remarks: [] }
  if (other || label === undefined)
    return {
      kind: 'other',
      what: `series "${name}" in ${unit?.label || 'no unit'} is no absorbance, transmittance or reflectance`,
    }
  const said = words.flatMap((word) => (word.kind === 'known' ? [word] : []))
  const quantities = [...new Set([label.quantity, ...said.map(({ quantity }) => quantity)])].filter((q) => q !== null)
  const [quantity, second] = quantities
  if (quantity === undefined) {
    const what = `series "${name}" does not say whether it is absorbance, transmittance or reflectance`
    return flaw('ordinate-unknown', what, ['absorbance', label.percent ? 'percent-transmittance' : 'transmittance'])
  }
  if (second !== undefined || words.some(({ kind }) => kind === 'several')) {
    const what = `series "${name}" is called ${quantities.join(' and ')} at once`
    return flaw('unit-contradiction', what, quantities)
  }
  const percent = label.percent || said.some((word) => word.percent)
  const remarks: [string, string][] = []
  const si = unit?.si ?? null
  if (si !== null && si.dimension === 'A1' && plainWords(unit!.label) === 'a') {
    if (said.length === 0)
      return flaw('unit-contradiction', 'label A with the ampere may be absorbance or an electric current', [
        'absorbance',
      ])
    remarks.push(['unit-ampere', 'the unit is the ampere; label A was taken for absorbance, as the series says'])
  } else if (si !== null && si.dimension !== '') {
    return flaw('unit-contradiction', `${quantity} has no unit, the SIUnits say ${si.dimension}`, [quantity])
  }
  return scaled(quantity, percent, label, si === null ? null : [si.factors[0], si.offset], largest, remarks, unit, flaw)
}

const scaled = (
  quantity: Quantity,
  percent: boolean,
  label: LabelMeaning,
  si: readonly [number, number] | null,
  largest: number,
  remarks: [string, string][],
  unit: WrittenUnit | null,
  flaw: (code: string, what: string, settle?: readonly OrdinateKind[]) => UnitFlaw,
): OrdinateReading => {
  const [factor, offset] = si ?? [label.scale, 0]
  const ratio = quantity === 'transmittance' || quantity === 'reflectance'
  if (offset !== 0 && factor !== 1)
    return flaw('unit-contradiction', `an offset of ${offset} with a factor of ${factor} can be applied in two orders`)
  if (ratio && same(factor, 0.01)) {
    if (!(largest <= 200)) return flaw('ordinate-scale', `a ${quantity} of ${largest} percent is impossible`)
    return { kind: 'ordinate', y: `percent-${quantity}`, scale: 1, offset: 0, remarks }
  }
  const expected = percent ? 1 : label.scale
  if (unit !== null && unit.label !== '' && !same(factor, expected)) {
    const what = `the label says ${unit.label}, the SIUnits a factor of ${factor}`
    return flaw('unit-contradiction', what, [quantity])
  }
  const kind = ordinateKind(quantity, percent, largest * factor + offset)
  if (kind.kind === 'open') {
    const which = kind.readings.length > 0 ? `may be ${kind.readings.join(' or ')}` : 'is impossible'
    return flaw('ordinate-scale', `${kind.why} ${which}`, kind.readings)
  }
  if (kind.y.startsWith('percent-') && (!percent || si !== null)) {
    const what = `the unit means a fraction (factor ${factor}); values up to ${largest} can only be percent`
    remarks.push(['ordinate-scale', what])
  }
  return { kind: 'ordinate', y: kind.y, scale: factor, offset, remarks }
}
