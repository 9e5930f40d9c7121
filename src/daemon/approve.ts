import { ENGINE } from '../analysis/types.ts'
import { referenceOf } from '../series/index.ts'
import type { Occasion } from '../series/types.ts'
import type { Store } from '../store/index.ts'
import { type Subject, subjectOf } from './context.ts'
import { occasionsOfRows } from './occasions.ts'
import { occasionsNeeded } from './recipe.ts'
import type { RoomInForce } from './room.ts'

export interface ReferenceAsked {
  readonly sample: string
  readonly instrument: string
  readonly decision: number
  readonly at: number
  /** The newest occasions in place of the first. */
  readonly newest?: true
  /** As many as the study says, if left out. */
  readonly occasions?: number
}

export type ReferenceFixed =
  | {
      readonly kind: 'fixed'
      readonly instrument: string
      readonly spectra: readonly number[]
      /** The reference's splitting and first bands, in words. */
      readonly values: string
    }
  | Refused

interface Refused {
  readonly kind: 'refused'
  readonly why: string
  readonly remedy: string
}

/** Spectra at the most that the occasions are looked for in. */
const MOST_SPECTRA = 1_000

/** Fixes a sample's reference on an instrument because a person says so, or tells why that cannot be. Inside a transaction. */
export const fixReference = (asked: ReferenceAsked, store: Store, { config, studyOf }: RoomInForce): ReferenceFixed => {
  const { sample, instrument: name, decision, at } = asked
  const instrument = config.instruments.find((one) => one.name === name)
  const subject = instrument === undefined ? null : subjectOf(sample, instrument, studyOf, config)
  if (subject === null)
    return refused(`no study claims it on ${name}`, 'only samples of a study have a reference; name it in one')
  const other = comparedWith(subject)
  if (other !== null) return refused(`study ${subject.study.name} compares it with ${other}`, otherRemedy(other))
  const found = occasionsToFix(subject, asked, store)
  if (found.kind === 'refused') return found
  const spectra = found.occasions.flatMap((occasion) => occasion.spectra)
  const already = store.recipes.frozenReference(sample, name)
  const standing = already === null ? null : store.analyses.some(already, sample).map(({ spectrum }) => spectrum)
  if (standing !== null && sameNumbers(standing, spectra))
    return refused(
      `its reference is fixed on just these spectra already (${spectra.join(', ')})`,
      'nothing needs to be done; --newest takes later occasions',
    )
  store.recipes.freezeReference(sample, name, spectra, at, decision)
  return { kind: 'fixed', instrument: name, spectra, values: valuesOf(found.occasions) }
}

const refused = (why: string, remedy: string): Refused => ({ kind: 'refused', why, remedy })

const comparedWith = ({ sample, study: { reference } }: Subject): string | null => {
  if (reference.kind === 'values') return 'values that are typed in'
  return reference.kind === 'sample' && reference.sample !== sample ? reference.sample : null
}

const otherRemedy = (other: string): string =>
  other.startsWith('values') ? 'change them in the study' : `approve the reference of ${other} in its place`

const occasionsToFix = (
  subject: Subject,
  { sample, instrument, newest, occasions: wanted }: ReferenceAsked,
  store: Store,
): { readonly kind: 'found'; readonly occasions: readonly Occasion[] } | Refused => {
  const n = wanted ?? occasionsNeeded(subject)
  const recipe = store.recipes.of(sample, instrument)
  const of = { sample, instrument, recipe: recipe?.sha256 ?? null, engine: ENGINE }
  const rows = newest
    ? store.analyses.window(of, Number.MAX_SAFE_INTEGER, MOST_SPECTRA)
    : store.analyses.earliest(of, MOST_SPECTRA)
  const all = occasionsOfRows(rows, subject, store)
  if (recipe?.locked !== true || all.length < n)
    return refused(
      `its reference is still being gathered: ${all.length} of ${n} occasions`,
      wanted === undefined && recipe?.locked === true
        ? 'wait for more spectra, or say --occasions'
        : 'wait until it is complete: how its spectra are fitted is settled then',
    )
  return { kind: 'found', occasions: newest ? all.slice(-n) : all.slice(0, n) }
}

const sameNumbers = (a: readonly number[], b: readonly number[]): boolean =>
  a.length === b.length && a.every((one) => b.includes(one))

const valuesOf = (occasions: readonly Occasion[]): string => {
  const state = referenceOf(occasions, occasions.length, { approved: true })
  if (state.kind !== 'ready') return 'no values'
  return ['delta_o', 'nu1', 'nu2']
    .flatMap((name) => {
      const [value, u] = [state.values[name] ?? null, state.u[name] ?? null]
      return value === null ? [] : [`${name} ${value.toFixed(1)}${u === null ? '' : ` ± ${u.toFixed(1)}`} cm^-1`]
    })
    .join(', ')
}
