import { z } from 'zod'
import { count, name, spectral, text, word } from '../pieces.ts'

const role = () => text().describe('nu1, nu2 …; nu1a and nu1b of a split band; sf1 … of spin-forbidden ones')
const ligands = () => z.record(z.string(), count(12)).describe('Ligand and how many of it')

/** What one compound may turn into, in the words of the diagnosis. */
export const CAUSES = [
  'substitution',
  'isomerisation',
  'redox',
  'acid-base',
  'spin-state',
  'solvation',
  'decomposition',
  'precipitation',
] as const

/** `species/*.yaml` */
export const speciesSchema = z.strictObject({
  species: name(),
  title: text().optional().describe('Formula as letters write it'),
  ion: text().describe('Central ion, such as Cr3+'),
  geometry: word(['octahedral', 'tetrahedral']),
  spin: word(['high', 'low']).optional().describe('Only where both occur'),
  state: word(['solution', 'solid']).prefault('solution'),
  ligands: ligands(),
  bands: z
    .array(
      z.strictObject({
        role: role(),
        near: spectral(),
        within: spectral(),
        shape: word(['gaussian', 'log-normal', 'pseudo-voigt', 'progression'])
          .prefault('gaussian')
          .describe(
            'Shape in wavenumber; what it holds besides position and width is found on the reference and locked',
          ),
        narrow: z.boolean().prefault(false).describe('A spin-forbidden feature, narrower than an allowed band'),
      }),
    )
    .prefault([])
    .describe('Where bands are expected; nm are read as measured in air'),
  'may-become': z
    .array(
      z.strictObject({
        ligands: ligands(),
        cause: word(CAUSES),
        near: z.record(z.string(), spectral()).prefault({}).describe('Where the bands of the product lie'),
      }),
    )
    .prefault([])
    .describe('Products that the chemistry makes likely'),
})

export type SpeciesFile = z.output<typeof speciesSchema>
