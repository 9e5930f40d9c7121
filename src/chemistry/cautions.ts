/**
 * Usual cautions of coordination chemistry at the bench (common practice; those on hexacyano complexes and perchlorates
 * are in every laboratory handbook). They are reminders beside a letter, never an assessment of a risk.
 */
import type { Species } from '../config/types.ts'

/** What a caution keeps people from being advised to do. */
export type Handling = 'filtering' | 'warming' | 'acid' | 'closing'

interface Hazard {
  readonly concerns: (species: Species) => boolean
  readonly caution: string
  readonly forbids: readonly Handling[]
}

const LOCAL_RULES_FIRST = 'Your safety data sheet and local rules come first.'
const COMPOUND_UNKNOWN = 'tendq does not know what this sample is, so it knows none of its hazards.'

/** Formulas that a ligand's name can stand for once its charge is taken off: `CN-` is CN, `N3-` is N3, `CO3^2-` is CO3. */
const formulasOf = (ligand: string): readonly string[] => [
  ligand.replace(/[+\-−⁺⁻]+$/u, ''),
  ligand.replace(/[\^ ]?[0-9²³]?[+\-−⁺⁻]+$/u, ''),
]

const holds =
  (...names: readonly string[]) =>
  ({ ligands }: Species): boolean =>
    Object.keys(ligands).some((ligand) => formulasOf(ligand).some((formula) => names.includes(formula)))

/** Counter-ions stand in the title's formula, as in `[Cr(NH3)6](ClO4)3`. */
const named =
  (pattern: RegExp) =>
  (species: Species): boolean =>
    pattern.test(species.title) ||
    pattern.test(species.name) ||
    Object.keys(species.ligands).some((ligand) => pattern.test(ligand))

const element =
  (symbol: string) =>
  ({ ion }: Species): boolean =>
    new RegExp(`^${symbol}(?![a-z])`).test(ion)

/** Ligands in which nothing can be burnt; any other counts as fuel beside an oxidising anion. */
const NO_FUEL = new Set(['H2O', 'OH', 'O', 'F', 'Cl', 'Br', 'I', 'SO4', 'NO3', 'CO3', 'PO4', 'ClO4', 'ClO3'])
const isFuelled = ({ ligands }: Species): boolean =>
  Object.keys(ligands).some((ligand) => !formulasOf(ligand).some((formula) => NO_FUEL.has(formula)))
const hasOxidisingAnion = named(/ClO[34]|(per)?chlorate/i)

const HAZARDS: readonly Hazard[] = [
  {
    concerns: (species) => hasOxidisingAnion(species) && isFuelled(species),
    caution:
      'Ammine and organic complexes with chlorate or perchlorate can explode when dry, warmed, rubbed or struck, also as a film on a frit or at the edge of a cell.',
    forbids: ['filtering', 'warming'],
  },
  {
    concerns: holds('N3'),
    caution:
      'Azides give hydrazoic acid (very toxic, explosive) with acid, and explosive salts with heavy metals, in drains too.',
    forbids: ['filtering', 'warming', 'acid'],
  },
  {
    concerns: named(/\(O2\)|^O2(\^?2)?-$|H2O2|peroxo|peroxide/i),
    caution: 'Peroxo complexes can decompose violently when dry or warmed, and give off oxygen in closed cells.',
    forbids: ['filtering', 'warming', 'closing'],
  },
  {
    concerns: holds('CN'),
    caution:
      'Cyano complexes, nitroprusside too, can give hydrogen cyanide with acid or in light: never acidify, keep dark.',
    forbids: ['acid', 'warming'],
  },
  {
    concerns: holds('SCN', 'NCS'),
    caution: 'Thiocyanates can give hydrogen cyanide with strong or oxidising acid or when heated.',
    forbids: ['acid', 'warming'],
  },
  {
    concerns: holds('F'),
    caution: 'Fluoro complexes with acid give hydrogen fluoride: severe burns, and it etches glass and quartz cells.',
    forbids: ['acid', 'warming'],
  },
  {
    concerns: holds('CO3'),
    caution: 'Carbonato complexes give off carbon dioxide with acid: do not close the cell tightly.',
    forbids: ['closing', 'acid'],
  },
  {
    concerns: element('Cr'),
    caution:
      'Chromium(VI), which chromium compounds can turn into, is toxic and carcinogenic; it absorbs strongly near 372 nm (alkaline) or 350 nm (acid).',
    forbids: [],
  },
  {
    concerns: element('Ni'),
    caution: 'Nickel compounds are carcinogenic when inhaled and sensitise skin and airways.',
    forbids: [],
  },
  {
    concerns: element('Co'),
    caution: 'Cobalt compounds sensitise skin and airways, and soluble ones are suspected carcinogens.',
    forbids: [],
  },
]

const hazardsOf = (species: Species): readonly Hazard[] => HAZARDS.filter(({ concerns }) => concerns(species))

const GAS =
  'A compound that decomposes may give off gas: do not keep it in a tightly closed cell, and open one behind a shield.'

/** Cautions that go with a letter about this compound, the general one always last. */
export const cautionsFor = (species: Species | null, diagnosis: string): readonly string[] => {
  if (species === null) return [COMPOUND_UNKNOWN, LOCAL_RULES_FIRST]
  return [
    ...hazardsOf(species).map(({ caution }) => caution),
    ...(diagnosis === 'decomposition' || diagnosis === 'redox' ? [GAS] : []),
    LOCAL_RULES_FIRST,
  ]
}

/** Whether a letter may advise it. What is not known is not advised to be handled at all. */
export const mayAdvise = (species: Species | null, handling: Handling): boolean =>
  species !== null && !hazardsOf(species).some(({ forbids }) => forbids.includes(handling))
