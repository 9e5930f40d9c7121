import type { Species } from '../../src/config/types.ts'

/** [CrCl(NH3)5]2+ at 512 and 375 nm, to [Cr(NH3)5(H2O)]3+ at 480 and 360 nm (from memory). */
export const CHLORO: Species = {
  name: 'chloropentaammine',
  title: '[CrCl(NH3)5]2+',
  ion: 'Cr3+',
  geometry: 'octahedral',
  spin: null,
  state: 'solution',
  ligands: { NH3: 5, 'Cl-': 1 },
  bands: [],
  mayBecome: [{ ligands: { NH3: 5, H2O: 1 }, cause: 'substitution', nearPerCm: { nu1: 1e7 / 480, nu2: 1e7 / 360 } }],
}
