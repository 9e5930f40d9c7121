/**
 * Where the bands of a compound would stand after an exchange of ligands: as the species says it (`may-become`), and
 * where that names no positions by the rule of average environment (chemistry/ligands.ts): Δ and B of both compounds are
 * estimated, and each band moves by the difference that the levels of the two fields make. Where no B can be estimated,
 * every band moves in the ratio of Δ.
 */
import { findIon } from '../chemistry/ions.ts'
import { averageEnvironment, findLigand } from '../chemistry/ligands.ts'
import type { Species } from '../config/types.ts'
import { bandModel } from '../ligandField/model.ts'
import { termScheme } from '../ligandField/terms.ts'

/** A ligand that comes in, and how many of it. */
export interface Exchange {
  readonly ligand: string
  readonly count: number
}

export type Move =
  /** To this vacuum wavenumber. cm⁻¹ */
  | { readonly kind: 'at'; readonly perCm: number }
  /** By so much. cm⁻¹ */
  | { readonly kind: 'by'; readonly perCm: number }
  | { readonly kind: 'times'; readonly factor: number }

export type Product =
  | {
      readonly kind: 'product'
      readonly ligands: Readonly<Record<string, number>>
      readonly from: 'may-become' | 'average environment'
      /** By role; bands of other roles stay. */
      readonly moves: Readonly<Record<string, Move>>
    }
  | { readonly kind: 'none'; readonly why: string }

export const productOf = (species: Species, exchange: Exchange): Product => {
  const ways = exchanges(species.ligands, exchange)
  if (ways.length === 0)
    return none(
      `${exchange.count} ${exchange.ligand} cannot take the place of whole ligands of ${sayLigands(species.ligands)}`,
    )
  const named = species.mayBecome.find(({ ligands }) => ways.some((way) => same(way, ligands)))
  if (named !== undefined && Object.keys(named.nearPerCm).length > 0) {
    const moves = Object.fromEntries(
      Object.entries(named.nearPerCm).map(([role, perCm]) => [role, { kind: 'at', perCm } as const]),
    )
    return { kind: 'product', ligands: named.ligands, from: 'may-become', moves }
  }
  // of several ways, the one that the species names, else the one in which the weakest ligand leaves
  return byAverageEnvironment(species, ways.find((way) => named !== undefined && same(way, named.ligands)) ?? ways[0]!)
}

const none = (why: string): Product => ({ kind: 'none', why })

const plainName = (name: string): string => findLigand(name)?.name ?? name
const denticityOf = (name: string): number => findLigand(name)?.denticity ?? 1
const strengthOf = (name: string): number => findLigand(name)?.f ?? Infinity

/** What may come of the exchange, the weakest ligand leaving first. */
const exchanges = (
  ligands: Readonly<Record<string, number>>,
  { ligand, count }: Exchange,
): readonly Readonly<Record<string, number>>[] =>
  Object.keys(ligands)
    .filter((name) => plainName(name) !== plainName(ligand))
    .sort((a, b) => strengthOf(a) - strengthOf(b))
    .flatMap((leaving) => {
      const left = ligands[leaving]! - (count * denticityOf(ligand)) / denticityOf(leaving)
      if (!Number.isInteger(left) || left < 0) return []
      const stays = Object.entries(ligands).filter(([name]) => name !== leaving)
      const incoming = stays.find(([name]) => plainName(name) === plainName(ligand))
      const others = stays.filter((one) => one !== incoming)
      return [
        Object.fromEntries([
          ...others,
          ...(left > 0 ? [[leaving, left] as const] : []),
          [incoming?.[0] ?? ligand, (incoming?.[1] ?? 0) + count],
        ]),
      ]
    })

const same = (a: Readonly<Record<string, number>>, b: Readonly<Record<string, number>>): boolean => {
  const plain = (ligands: Readonly<Record<string, number>>) =>
    Object.entries(ligands)
      .map(([name, n]) => `${n} ${plainName(name)}`)
      .sort()
      .join()
  return plain(a) === plain(b)
}

const sayLigands = (ligands: Readonly<Record<string, number>>): string =>
  Object.entries(ligands)
    .map(([name, n]) => `${n} ${name}`)
    .join(', ')

const byAverageEnvironment = (species: Species, ligands: Readonly<Record<string, number>>): Product => {
  const search = findIon(species.ion)
  if (search.kind !== 'found' || species.geometry !== 'octahedral')
    return none('average environment is known for octahedral complexes only; give `near` in `may-become`')
  const { ion } = search
  const [before, after] = [averageEnvironment(ion, species.ligands), averageEnvironment(ion, ligands)]
  const unknown = [before, after].flatMap((one) => (one.kind === 'unknown' ? one.ligands : []))
  if (before.kind === 'unknown' || after.kind === 'unknown')
    return none(`nothing is tabulated for ${[...new Set(unknown)].join(', ')}; give \`near\` in \`may-become\``)
  if (before.deltaPerCm === null || after.deltaPerCm === null)
    return none(`no field strength is tabulated for ${species.ion}; give \`near\` in \`may-become\``)
  const scheme = termScheme(ion.d, species.geometry, species.spin)
  if (scheme === null) return none(`the bands of ${species.ion} have no roles here`)
  const product = { kind: 'product', ligands, from: 'average environment' } as const
  const { deltaPerCm, bPerCm } = before
  const factor = after.deltaPerCm / deltaPerCm
  const model = bandModel(scheme, scheme.transitions)
  const positions = (delta: number, b: number): Float64Array => {
    const out = new Float64Array(model.count)
    model.evaluate(delta, b, ion.cOverB * b, out, new Float64Array(3 * model.count))
    return out
  }
  const [from, to] =
    bPerCm === null || after.bPerCm === null
      ? [null, null]
      : [positions(deltaPerCm, bPerCm), positions(after.deltaPerCm, after.bPerCm)]
  const moves = scheme.transitions.map(({ role }, i): [string, Move] => [
    role,
    from === null || to === null ? { kind: 'times', factor } : { kind: 'by', perCm: to[i]! - from[i]! },
  ])
  return { ...product, moves: Object.fromEntries(moves) }
}
