/**
 * Published complexes: maxima as read off spectra and the Δ, B printed beside them. Unless a source is given, bands and
 * parameters are from memory of the usual tables (Lever, Inorganic Electronic Spectroscopy; Jørgensen, Absorption Spectra
 * and Chemical Bonding; Figgis and Hitchman, Ligand Field Theory and its Applications), cm⁻¹, rounded as printed there.
 */
export interface Published {
  readonly complex: string
  readonly ion: string
  readonly geometry?: 'tetrahedral'
  readonly bands: Readonly<Record<string, number>>
  readonly deltaPerCm: number
  readonly bPerCm: number | null
  /** Why the computed values may differ by more than 3 % in Δ or 6 % in B. */
  readonly note?: string
}

const THREE = 'printed B balances three bands, the two lower alone give more'
const ILL = 'ν1 and ν2 of d8 hold B loosely; the third band settles it'
const C4 = 'printed with C = 4 B, here C/B 4.5'

export const PUBLISHED: readonly Published[] = [
  { complex: '[Ti(H2O)6]3+', ion: 'Ti3+', bands: { nu1: 20300 }, deltaPerCm: 20300, bPerCm: null },
  { complex: '[V(H2O)6]3+', ion: 'V3+', bands: { nu1: 17800, nu3: 25700 }, deltaPerCm: 19000, bPerCm: 610 },
  { complex: '[VF6]3-', ion: 'V3+', bands: { nu1: 14800, nu3: 23250 }, deltaPerCm: 16100, bPerCm: 649 },
  {
    complex: '[V(H2O)6]2+',
    ion: 'V2+',
    bands: { nu1: 12350, nu2: 18500, nu3: 27900 },
    deltaPerCm: 12350,
    bPerCm: 680,
    note: 'printed B is that of the two lower bands',
  },
  {
    complex: '[CrF6]3-',
    ion: 'Cr3+',
    bands: { nu1: 14900, nu2: 22700, nu3: 34400 },
    deltaPerCm: 14900,
    bPerCm: 827,
    note: THREE,
  },
  {
    complex: '[Cr(H2O)6]3+',
    ion: 'Cr3+',
    bands: { nu1: 17400, nu2: 24600, nu3: 37800 },
    deltaPerCm: 17400,
    bPerCm: 725,
  },
  { complex: '[Cr(NH3)6]3+', ion: 'Cr3+', bands: { nu1: 21550, nu2: 28500 }, deltaPerCm: 21550, bPerCm: 657 },
  { complex: '[Cr(en)3]3+', ion: 'Cr3+', bands: { nu1: 21850, nu2: 28500 }, deltaPerCm: 21850, bPerCm: 620 },
  { complex: '[Cr(ox)3]3-', ion: 'Cr3+', bands: { nu1: 17500, nu2: 23900 }, deltaPerCm: 17500, bPerCm: 620 },
  { complex: '[Cr(NCS)6]3-', ion: 'Cr3+', bands: { nu1: 17800, nu2: 23800 }, deltaPerCm: 17800, bPerCm: 570 },
  { complex: '[Cr(CN)6]3-', ion: 'Cr3+', bands: { nu1: 26700, nu2: 32600 }, deltaPerCm: 26700, bPerCm: 530 },
  { complex: '[CrCl6]3-', ion: 'Cr3+', bands: { nu1: 13200, nu2: 18700 }, deltaPerCm: 13200, bPerCm: 560 },
  { complex: '[MnF6]2-', ion: 'Mn4+', bands: { nu1: 21750, nu2: 28200 }, deltaPerCm: 21750, bPerCm: 600 },
  {
    complex: '[Mn(H2O)6]2+',
    ion: 'Mn2+',
    bands: { nu1: 18870, nu2: 23120, nu3: 25100, nu4: 27980, nu5: 29750 },
    deltaPerCm: 8480,
    bPerCm: 671,
    note: 'the fit without Trees and seniority corrections is compared with one that has them',
  },
  { complex: '[Fe(H2O)6]2+', ion: 'Fe2+', bands: { nu1: 9400 }, deltaPerCm: 9400, bPerCm: null },
  { complex: '[Co(NH3)6]3+', ion: 'Co3+', bands: { nu1: 21050, nu2: 29500 }, deltaPerCm: 22900, bPerCm: 620, note: C4 },
  { complex: '[Co(en)3]3+', ion: 'Co3+', bands: { nu1: 21470, nu2: 29500 }, deltaPerCm: 23200, bPerCm: 590, note: C4 },
  { complex: '[Co(ox)3]3-', ion: 'Co3+', bands: { nu1: 16600, nu2: 23800 }, deltaPerCm: 18000, bPerCm: 540, note: C4 },
  { complex: '[Co(CN)6]3-', ion: 'Co3+', bands: { nu1: 32400, nu2: 39000 }, deltaPerCm: 33500, bPerCm: 460, note: C4 },
  { complex: '[Rh(NH3)6]3+', ion: 'Rh3+', bands: { nu1: 32800, nu2: 39100 }, deltaPerCm: 34100, bPerCm: 430, note: C4 },
  { complex: '[RhCl6]3-', ion: 'Rh3+', bands: { nu1: 19300, nu2: 24300 }, deltaPerCm: 20300, bPerCm: 350, note: C4 },
  { complex: '[Co(H2O)6]2+', ion: 'Co2+', bands: { nu1: 8100, nu3: 19400 }, deltaPerCm: 9200, bPerCm: 825 },
  { complex: '[Co(NH3)6]2+', ion: 'Co2+', bands: { nu1: 9000, nu3: 21100 }, deltaPerCm: 10200, bPerCm: 885 },
  {
    complex: '[CoCl4]2-',
    ion: 'Co2+',
    geometry: 'tetrahedral',
    bands: { nu2: 5460, nu3: 14700 },
    deltaPerCm: 3120,
    bPerCm: 710,
  },
  {
    complex: '[Co(NCS)4]2-',
    ion: 'Co2+',
    geometry: 'tetrahedral',
    bands: { nu2: 7780, nu3: 16250 },
    deltaPerCm: 4550,
    bPerCm: 691,
  },
  {
    complex: '[Ni(H2O)6]2+',
    ion: 'Ni2+',
    bands: { nu1: 8500, nu2: 13800, nu3: 25300 },
    deltaPerCm: 8500,
    bPerCm: 905,
    note: ILL,
  },
  {
    complex: '[Ni(NH3)6]2+',
    ion: 'Ni2+',
    bands: { nu1: 10750, nu2: 17500, nu3: 28200 },
    deltaPerCm: 10750,
    bPerCm: 890,
    note: ILL,
  },
  {
    complex: '[Ni(en)3]2+',
    ion: 'Ni2+',
    bands: { nu1: 11200, nu2: 18350, nu3: 29000 },
    deltaPerCm: 11200,
    bPerCm: 840,
    note: ILL,
  },
  {
    complex: '[Ni(dmso)6]2+',
    ion: 'Ni2+',
    bands: { nu1: 7730, nu2: 12970, nu3: 24040 },
    deltaPerCm: 7730,
    bPerCm: 929,
    note: ILL,
  },
  { complex: '[Cu(H2O)6]2+', ion: 'Cu2+', bands: { nu1: 12600 }, deltaPerCm: 12600, bPerCm: null },
]
