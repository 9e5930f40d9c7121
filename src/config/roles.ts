import { findIon } from '../chemistry/ions.ts'
import { hasTwoSpins, termScheme } from '../ligandField/terms.ts'
import type { Geometry, Spin } from '../ligandField/types.ts'
import { suggestion } from '../rules/suggest.ts'

export interface Trouble {
  readonly what: string
  readonly remedy: string
}

interface Centre {
  readonly ion: string
  readonly geometry: Geometry
  readonly spin?: Spin | undefined
}

/** Null where the ion has d–d bands; else what is wrong with it. */
export const faultOfIon = (ion: string): Trouble | null => {
  const search = findIon(ion)
  if (search.kind === 'found') return null
  const remedy = search.nearest === null ? 'write the ion as in Cr3+' : `did you mean ${search.nearest}?`
  return { what: search.why, remedy }
}

/** Null where spin is said exactly where it must be (an unknown ion is another fault). */
export const faultOfSpin = ({ ion, geometry, spin }: Centre): Trouble | null => {
  const search = findIon(ion)
  if (search.kind === 'unknown') return null
  const { d, symbol } = search.ion
  const two = hasTwoSpins(d, geometry)
  if (two && spin === undefined)
    return { what: `${symbol} (d${d}) occurs high-spin and low-spin`, remedy: 'add `spin: high` or `spin: low`' }
  if (!two && spin === 'low')
    return { what: `${symbol} (d${d}), ${geometry}, is not known low-spin`, remedy: 'delete the key `spin`' }
  return null
}

/** Spin as the later rooms want it: null where only one state exists. */
export const spinOf = ({ ion, geometry, spin }: Centre): Spin | null => {
  const search = findIon(ion)
  return search.kind === 'found' && hasTwoSpins(search.ion.d, geometry) ? (spin ?? null) : null
}

/** Null where a band of this ion can have the role; `nu1a` and `nu1b` are parts of a split `nu1`. */
export const faultOfRole = (role: string, centre: Centre): Trouble | null => {
  const search = findIon(centre.ion)
  if (search.kind === 'unknown') return null
  const scheme = termScheme(search.ion.d, centre.geometry, spinOf(centre))
  if (scheme === null)
    return {
      what: `the bands of ${centre.spin ?? ''}-spin ${search.ion.symbol} (d${search.ion.d}) have no roles here`,
      remedy: 'leave `bands` out: positions are followed, no parameters derived',
    }
  const roles = scheme.transitions.map((transition) => transition.role)
  if (roles.includes(role.replace(/^(nu\d)[ab]$/, '$1'))) return null
  const near = suggestion(role, roles)
  const list = `its roles are ${roles.join(', ')} (a and b added for the parts of a split band)`
  return {
    what: `${search.ion.symbol} has no band "${role}"`,
    remedy: near === null || /^(nu|sf)\d$/.test(role) ? list : `did you mean ${near}? ${list}`,
  }
}
