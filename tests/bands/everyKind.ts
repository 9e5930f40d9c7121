/**
 * Made-up exports of many kinds with known truth, through reading's end to the ligand field: wavelengths in air, noise that differs along the
 * axis, lamps that change, gaps, saturation, windows that cut a band. Five spectra of a sample choose a recipe; five more are fitted by it.
 */
import { analyse, lockRecipe } from '../../src/analysis/index.ts'
import type { Analysis, AnalysisContext } from '../../src/analysis/types.ts'
import { findIon } from '../../src/chemistry/ions.ts'
import { solveParameters } from '../../src/ligandField/index.ts'
import type { RawSpectrum } from '../../src/readers/types.ts'
import { prepareSpectrum } from '../../src/spectrum/index.ts'
import { vacuumPerCm } from '../../src/spectrum/units.ts'
import { curveOf, gaussianNoise, generator, type Truth } from './simulated.ts'

export const KINDS = [
  'plain',
  'three bands',
  'flank',
  'lamp step',
  'uneven noise',
  'gap',
  'saturated',
  'cut window',
  'coarse',
  'spikes',
] as const
export type Kind = (typeof KINDS)[number]

export interface Checked {
  readonly kind: Kind
  readonly quantity: string
  readonly error: number
  readonly u: number
  readonly flags: readonly string[]
}

const cr = findIon('Cr3+')
if (cr.kind !== 'found') throw new Error('no Cr3+')
const CONTEXT: AnalysisContext = {
  prepare: { medium: 'air', absorbanceLimit: 2, bandwidthNm: 1 },
  ion: cr.ion,
  geometry: 'octahedral',
  spin: null,
  expected: [],
  bands: null,
  repeatabilityNm: null,
}

type Window = readonly [fromNm: number, toNm: number, stepNm: number]

/** Flags that tell of a number that may be off. */
export const TELLING = [
  'at-bound',
  'outside-window',
  'no-band',
  'misfit',
  'ill-conditioned',
  'not-converged',
  'impossible-ratio',
]

/** One sample of a kind: what is off by how much, with its uncertainty. `other`: spectra described by another number of bands. */
export const sampleOf = (
  kind: Kind,
  seed: number,
): { readonly checked: readonly Checked[]; readonly other: number } => {
  const random = generator(seed)
  const normal = gaussianNoise(random)
  const between = (a: number, b: number) => a + (b - a) * random()
  const tall = kind === 'saturated'
  const nu1 = between(16500, 18500)
  const nu2 = nu1 * between(1.33, 1.42)
  const truth: Truth = {
    bands: [
      [nu1, between(3000, 4200), tall ? between(2.2, 3) : between(0.25, 0.8)],
      [nu2, between(3200, 4400), between(0.25, 0.8)],
      ...(kind === 'three bands' ? [[between(33500, 36000), between(3500, 4500), between(0.2, 0.6)] as const] : []),
    ],
    constant: between(-0.005, 0.02),
    scatter: between(0.002, 0.03),
    ...(kind === 'flank' ? { flank: [between(37000, 42000), between(5500, 8000), between(0.5, 2)] as const } : {}),
  }
  const noise = 10 ** between(-3.6, -2.7)
  const window: Window =
    kind === 'three bands'
      ? [250, 900, 1]
      : kind === 'cut window'
        ? [1e7 / nu2 - 5, 850, 1]
        : kind === 'coarse'
          ? [330, 850, 4]
          : [330, 850, 1]
  const step = kind === 'lamp step' ? between(0.002, 0.01) : 0
  const curve = curveOf(truth)
  const raws = Array.from({ length: 10 }, () => rawOf(curve, window, kind, noise, step, normal, random))
  const prepared = raws.slice(0, 5).flatMap((raw) => {
    const one = prepareSpectrum(raw, CONTEXT.prepare)
    return one.kind === 'prepared' ? [one.spectrum] : []
  })
  const locked = lockRecipe(prepared, CONTEXT)
  if ('why' in locked) return { checked: [], other: raws.length }
  const analyses = raws
    .map((raw) => analyse(raw, CONTEXT, locked))
    .flatMap((one) => (one.kind === 'analysed' ? [one.analysis] : []))
  const field = fieldOf(truth)
  const want = truth.bands.length
  const alike = analyses.filter(
    ({ fit }) => fit.kind === 'fitted' && fit.components.filter((c) => c.kind === 'band').length === want,
  )
  const checked = alike.flatMap((analysis, i) => [
    ...bandsChecked(kind, truth, analysis),
    ...fieldChecked(kind, field, analysis),
    ...(i === 0 ? [] : differences(kind, alike[i - 1]!, analysis)),
  ])
  return { checked, other: raws.length - alike.length }
}

const rawOf = (
  curve: (perCm: number) => number,
  [from, to, stepNm]: Window,
  kind: Kind,
  noise: number,
  step: number,
  normal: () => number,
  random: () => number,
): RawSpectrum => {
  const all = Array.from({ length: Math.round((to - from) / stepNm) + 1 }, (_, i) => from + i * stepNm)
  const x = Float64Array.from(kind === 'gap' ? all.filter((nm) => nm < 640 || nm > 660) : all)
  const spike = kind === 'spikes' ? Math.floor(random() * x.length) : -1
  const y = x.map((nm, i) => {
    const uneven = kind === 'uneven noise' ? 1 + 15 * ((nm - 590) / 260) ** 4 : 1
    const a = curve(vacuumPerCm(nm, 'nm', 'air')) + (nm > 600 ? step : 0)
    return (
      a + noise * uneven * normal() * (kind === 'saturated' ? Math.max(1, 10 ** (a - 1)) : 1) + (i === spike ? 0.3 : 0)
    )
  })
  return {
    index: 0,
    x,
    y,
    xUnit: 'nm',
    medium: 'air',
    yKind: 'absorbance',
    ...{ sample: null, title: null, time: null, pathMm: null, temperatureC: null, concentrationMolPerL: null },
    header: {},
    warnings: [],
  }
}

/** Δ and B that the true positions of the first two bands give. */
const fieldOf = ({ bands }: Truth) => {
  const positions = bands.slice(0, 2).map(([p], k) => ({ role: `nu${k + 1}`, positionPerCm: p }))
  return solveParameters(cr.ion, 'octahedral', null, positions, [
    [1, 0],
    [0, 1],
  ])
}

const bandsChecked = (kind: Kind, truth: Truth, { bands, flags }: Analysis): readonly Checked[] =>
  bands
    .filter(({ role }) => role !== null)
    .slice(0, 2)
    .flatMap(({ positionPerCm, uPositionPerCm }, k) =>
      uPositionPerCm === null
        ? []
        : [{ kind, quantity: `nu${k + 1}`, error: positionPerCm - truth.bands[k]![0], u: uPositionPerCm, flags }],
    )

const fieldChecked = (
  kind: Kind,
  field: ReturnType<typeof fieldOf>,
  { ligandField: own, flags }: Analysis,
): readonly Checked[] => {
  if (own === null || own.bandsUsed.length !== 2 || own.uDeltaPerCm === null || own.uBPerCm === null) return []
  return [
    { kind, quantity: 'delta', error: own.deltaPerCm! - field.deltaPerCm!, u: own.uDeltaPerCm, flags },
    { kind, quantity: 'b', error: own.bPerCm! - field.bPerCm!, u: own.uBPerCm, flags },
  ]
}

/** Two spectra of one sample have no true difference. */
const differences = (kind: Kind, one: Analysis, other: Analysis): readonly Checked[] =>
  other.bands.slice(0, 2).flatMap(({ positionPerCm, uPositionPerCm }, k) => {
    const before = one.bands[k]
    if (uPositionPerCm === null || before?.uPositionPerCm == null) return []
    return [
      {
        kind,
        quantity: `difference of nu${k + 1}`,
        error: positionPerCm - before.positionPerCm,
        u: Math.hypot(uPositionPerCm, before.uPositionPerCm),
        flags: other.flags,
      },
    ]
  })
