import { mkdirSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { type DemoInstrument, delimitedText, jcampDx } from './instruments.ts'
import { DRIFTING, FRESH, STEADY_ON_UV1, STEADY_ON_UV2, UV1, UV2 } from './plan.ts'

export const READER_OF_LETTERS = 'stability@lab.example'
export const RULE_THAT_RINGS = 'first-band-shift'

const stamp = (at: number): string => new Date(at).toISOString().slice(0, 16).replace(/[-:]/g, '')

export const INSTRUMENTS: readonly DemoInstrument[] = [
  {
    name: 'uv1',
    measurements: UV1,
    fileName: ({ sample, at }) => `${sample}_${stamp(at)}.csv`,
    write: delimitedText,
    renames: false,
  },
  {
    name: 'uv2',
    measurements: UV2,
    fileName: ({ sample, at }) => `${sample}_${stamp(at)}.jdx`,
    write: jcampDx,
    renames: true,
  },
]

const FILES = (smtpPort: number): Readonly<Record<string, string>> => ({
  'tendq.yaml': `room: Demonstration room
data: ../data
timezone: Etc/UTC
keeper: [ keeper@lab.example ]
mail: { from: tendq@lab.example, host: 127.0.0.1, port: ${smtpPort}, security: none }
`,
  'instruments/uv1.yaml': `instrument: uv1
title: Double beam, north bench (writes delimited text)
drop: ../drop/uv1
files: "*.csv"
reading: { x: nm, medium: air, y: absorbance, delimiter: ";", decimal: "," }
sample: { from: filename, pattern: "^(?<sample>.+)_(?<time>[0-9]{8}T[0-9]{4})" }
`,
  'instruments/uv2.yaml': `instrument: uv2
title: Single beam, south bench (writes JCAMP-DX)
drop: ../drop/uv2
files: "*.jdx"
sample: { from: filename, pattern: "^(?<sample>.+)_(?<time>[0-9]{8}T[0-9]{4})" }
`,
  'species/chloropentaammine.yaml': `species: chloropentaammine
title: "[CrCl(NH3)5]2+"
ion: Cr3+
geometry: octahedral
ligands: { NH3: 5, Cl-: 1 }
bands:
  - { role: nu1, near: 512 nm, within: 20 nm }
  - { role: nu2, near: 375 nm, within: 15 nm }
may-become:
  - { ligands: { NH3: 5, H2O: 1 }, cause: substitution, near: { nu1: 480 nm, nu2: 360 nm } }
`,
  'species/hexaaqua.yaml': `species: hexaaqua
title: "[Cr(H2O)6]3+"
ion: Cr3+
geometry: octahedral
ligands: { H2O: 6 }
bands:
  - { role: nu1, near: 575 nm, within: 20 nm }
  - { role: nu2, near: 407 nm, within: 15 nm }
`,
  'species/tris-en.yaml': `species: tris-en
title: "[Cr(en)3]3+"
ion: Cr3+
geometry: octahedral
ligands: { en: 3 }
bands:
  - { role: nu1, near: 458 nm, within: 20 nm }
  - { role: nu2, near: 351 nm, within: 15 nm }
`,
  'studies/aging.yaml': `study: aging
title: How long a solution of the chloro complex keeps
species: chloropentaammine
kind: stability
samples: [ { name: ${FRESH} }, { name: ${DRIFTING} } ]
conditions: { temperature: 25 degC, measured-at: 25 degC, path: 10 mm, concentration: 0.012 mol/L, solvent: dilute acid }
reference: { sample: ${FRESH} }     # the study's sample drifts from the start, a fresh batch does not
tell: [ ${READER_OF_LETTERS} ]
`,
  'studies/steady-en.yaml': `study: steady-en
species: tris-en
kind: stability
samples: [ { name: ${STEADY_ON_UV1} } ]
conditions: { path: 10 mm, concentration: 0.006 mol/L }
reference: { first: 5 }
tell: [ ${READER_OF_LETTERS} ]
`,
  'studies/steady-aqua.yaml': `study: steady-aqua
species: hexaaqua
kind: stability
samples: [ { name: ${STEADY_ON_UV2} } ]
conditions: { path: 10 mm, concentration: 0.032 mol/L }
reference: { first: 5 }
tell: [ ${READER_OF_LETTERS} ]
`,
  'rules/rules.yaml': `rules:
  - rule: ${RULE_THAT_RINGS}
    title: First band has moved
    of: sample
    when: "abs(nu1 - reference(nu1)) > max(4 * sqrt(u(nu1)^2 + u_reference(nu1)^2), 60 cm^-1)"
    clear: "abs(nu1 - reference(nu1)) < 30 cm^-1"
    persist: 2
    priority: high
  - rule: noisy
    title: Spectra have become noisy
    of: sample
    when: "noise > 0.004"
    persist: 2
    priority: low
`,
})

export interface DemoRoom {
  readonly folder: string
  readonly configFolder: string
  readonly database: string
  readonly lettersFolder: string
  readonly dropFolderOf: (instrument: string) => string
}

/** Writes the configuration of the demonstration into a fresh folder. */
export const furnish = (folder: string, smtpPort: number): DemoRoom => {
  const configFolder = join(folder, 'config')
  for (const [name, text] of Object.entries(FILES(smtpPort))) {
    const path = join(configFolder, name)
    mkdirSync(dirname(path), { recursive: true })
    writeFileSync(path, text)
  }
  const dropFolderOf = (instrument: string) => join(folder, 'drop', instrument)
  for (const { name } of INSTRUMENTS) mkdirSync(dropFolderOf(name), { recursive: true })
  const lettersFolder = join(folder, 'letters')
  mkdirSync(lettersFolder)
  return { folder, configFolder, database: join(folder, 'data', 'tendq.db'), lettersFolder, dropFolderOf }
}
