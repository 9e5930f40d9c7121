import { writeFileSync } from 'node:fs'
import { type Command, Option } from 'commander'
import { findIon, type KnownIon } from '../chemistry/ions.ts'
import { EXIT, FaultError } from '../fault.ts'
import { type Field, faultsOfField, type Geometry, type Level, levels } from '../ligandField/index.ts'
import { levelDiagram } from '../pictures/levelDiagram.ts'
import { printJson, printLine, usageFault } from './print.ts'

interface Options {
  readonly ion?: string
  readonly delta?: string
  readonly b?: string
  readonly c?: string
  readonly geometry: Geometry
  readonly ds?: string
  readonly dt?: string
  readonly dsigma?: string
  readonly dtau?: string
  readonly zeta?: string
  readonly diagram?: string
  readonly diagramTo?: string
  readonly json?: true
}

const EXAMPLE = 'for example: tendq levels --ion Cr3+ --delta 17400 --b 725'

/** `tendq levels`: every level of the ion in the field, as a table, as JSON, as a diagram. */
export const addLevels = (program: Command): void => {
  program
    .command('levels')
    .summary('every level of a d ion in a ligand field')
    .description('Computes and labels every level of the ion from the ligand field and the repulsion of its electrons.')
    .option('--ion <ion>', 'the metal ion, such as Cr3+')
    .option('--delta <cm-1>', 'splitting Δ = 10Dq, positive in every geometry')
    .option('--b <cm-1>', 'Racah B; not needed for d1 and d9')
    .option('--c <cm-1>', 'Racah C; 4.5 B unless given')
    .addOption(
      new Option('--geometry <geometry>', 'symmetry of the field')
        .choices(['octahedral', 'tetrahedral'])
        .default('octahedral'),
    )
    .option('--ds <cm-1>', 'tetragonal Ds (D4h; Δ is then 10Dq of B1 → B2)')
    .option('--dt <cm-1>', 'tetragonal Dt')
    .option('--dsigma <cm-1>', 'trigonal Dσ (D3d)')
    .option('--dtau <cm-1>', 'trigonal Dτ')
    .option('--zeta <cm-1>', 'spin-orbit coupling of one d electron (Oh, Td)')
    .option('--diagram <svg>', 'draw E/B against Δ/B')
    .option('--diagram-to <ratio>', 'right end of the diagram, Δ/B; 1.25 times the given one unless said')
    .option('--json', 'one JSON object')
    .addHelpText(
      'after',
      `
Examples:
  tendq levels --ion Cr3+ --delta 17400 --b 725
  tendq levels --ion Co2+ --geometry tetrahedral --delta 3100 --b 720 --json
  tendq levels --ion Co3+ --delta 22900 --b 620 --c 2480 --diagram d6.svg
  tendq levels --ion Cr3+ --delta 21000 --b 650 --ds 200 --dt 300`,
    )
    .action((options: Options) => showLevels(options))
}

const showLevels = (options: Options): void => {
  const ion = ionOf(options.ion)
  const field = fieldOf(options, ion)
  const faults = faultsOfField(ion.d, field)
  if (faults.length > 0)
    throw new FaultError(
      faults.map((fault) => ({ ...fault, remedy: `${fault.remedy}; ${EXAMPLE}` })),
      EXIT.usage,
    )
  const list = levels(ion, field)
  if (options.diagram !== undefined) draw(options.diagram, options.diagramTo, ion, field)
  if (options.json) printJson(levelsJson(ion, field, list))
  else for (const line of table(ion, field, list)) printLine(line)
}

const ionOf = (asked: string | undefined): KnownIon => {
  if (asked === undefined) throw usageFault('--ion', 'no ion given', EXAMPLE)
  const found = findIon(asked)
  if (found.kind === 'found') return found.ion
  const nearest = found.nearest === null ? '' : `did you mean ${found.nearest}? `
  throw usageFault('--ion', found.why, `${nearest}${EXAMPLE}`)
}

const numberOf = (option: string, text: string): number => {
  const value = Number(text)
  if (text.trim() !== '' && Number.isFinite(value)) return value
  throw usageFault(option, `"${text}" is no number`, `give it in cm^-1; ${EXAMPLE}`)
}

const fieldOf = (options: Options, ion: KnownIon): Field => {
  if (options.delta === undefined) throw usageFault('--delta', 'no splitting given', EXAMPLE)
  const oneParticle = ion.d === 1 || ion.d === 9
  if (options.b === undefined && !oneParticle) throw usageFault('--b', 'no Racah B given', EXAMPLE)
  const bPerCm = options.b === undefined ? 0 : numberOf('--b', options.b)
  const optional = (key: keyof Field, option: string, text: string | undefined): Partial<Field> =>
    text === undefined ? {} : { [key]: numberOf(option, text) }
  return {
    geometry: options.geometry,
    deltaPerCm: numberOf('--delta', options.delta),
    bPerCm,
    cPerCm: options.c === undefined ? 4.5 * bPerCm : numberOf('--c', options.c),
    ...optional('dsPerCm', '--ds', options.ds),
    ...optional('dtPerCm', '--dt', options.dt),
    ...optional('dSigmaPerCm', '--dsigma', options.dsigma),
    ...optional('dTauPerCm', '--dtau', options.dtau),
    ...optional('zetaPerCm', '--zeta', options.zeta),
  }
}

const levelsJson = (ion: KnownIon, field: Field, list: readonly Level[]): unknown => ({
  ion: ion.symbol,
  d: ion.d,
  geometry: field.geometry,
  delta_cm1: field.deltaPerCm,
  b_cm1: field.bPerCm,
  c_cm1: field.cPerCm,
  ...(field.dsPerCm === undefined ? {} : { ds_cm1: field.dsPerCm }),
  ...(field.dtPerCm === undefined ? {} : { dt_cm1: field.dtPerCm }),
  ...(field.dSigmaPerCm === undefined ? {} : { dsigma_cm1: field.dSigmaPerCm }),
  ...(field.dTauPerCm === undefined ? {} : { dtau_cm1: field.dTauPerCm }),
  ...(field.zetaPerCm === undefined ? {} : { zeta_cm1: field.zetaPerCm }),
  levels: list.map(({ label, index, multiplicity, irrep, degeneracy, energyPerCm }) => ({
    label,
    index,
    multiplicity,
    irrep,
    degeneracy,
    energy_cm1: energyPerCm,
  })),
})

const table = (ion: KnownIon, field: Field, list: readonly Level[]): readonly string[] => {
  const { bPerCm: b, deltaPerCm: delta, cPerCm: c, geometry } = field
  const ground = list[0]!
  const coupled = (field.zetaPerCm ?? 0) !== 0
  const ratio = b > 0 ? `, Δ/B ${(delta / b).toFixed(2)}, C/B ${(c / b).toFixed(2)}` : ''
  const row = (cells: readonly string[]): string =>
    `${cells[0]!.padEnd(10)}${cells
      .slice(1)
      .map((cell) => cell.padStart(12))
      .join('')}`.trimEnd()
  return [
    `${ion.symbol}, d${ion.d}, ${geometry}: Δ ${delta}, B ${b}, C ${c} cm^-1${ratio}`,
    `ground level ${ground.label}${coupled ? '' : '; * marks levels of the same spin'}`,
    '',
    row(['level', 'degeneracy', 'E / cm^-1', 'E/B', 'nm (vacuum)']),
    ...list.map(({ label, index, multiplicity, degeneracy, energyPerCm: e }) => {
      const star = !coupled && multiplicity === ground.multiplicity ? ' *' : ''
      const nm = e > 1 ? (1e7 / e).toFixed(1) : '-'
      return row([`${label}(${index})${star}`, `${degeneracy}`, e.toFixed(1), b > 0 ? (e / b).toFixed(3) : '-', nm])
    }),
  ]
}

const draw = (path: string, upTo: string | undefined, ion: KnownIon, field: Field): void => {
  const distorted = [field.dsPerCm, field.dtPerCm, field.dSigmaPerCm, field.dTauPerCm, field.zetaPerCm]
  if (distorted.some((value) => value !== undefined && value !== 0))
    throw usageFault(
      '--diagram',
      'the diagram is drawn for Oh and Td without spin-orbit coupling',
      'leave those parameters out',
    )
  if (!(field.bPerCm > 0 && field.deltaPerCm > 0))
    throw usageFault('--diagram', 'E/B against Δ/B needs B and Δ above zero', EXAMPLE)
  const markDeltaOverB = field.deltaPerCm / field.bPerCm
  const upToDeltaOverB = upTo === undefined ? 1.25 * markDeltaOverB : numberOf('--diagram-to', upTo)
  if (!(upToDeltaOverB > 0)) throw usageFault('--diagram-to', 'no range to draw', 'give a Δ/B above zero, such as 40')
  const svg = levelDiagram({
    ion: ion.symbol,
    d: ion.d,
    geometry: field.geometry,
    cOverB: field.cPerCm / field.bPerCm,
    upToDeltaOverB,
    markDeltaOverB: markDeltaOverB <= upToDeltaOverB ? markDeltaOverB : null,
  })
  try {
    writeFileSync(path, svg)
  } catch (error) {
    const what = error instanceof Error ? error.message : String(error)
    throw new FaultError(
      [{ code: 'cannot-write', place: { at: path }, what, remedy: 'name a file in a folder that can be written to' }],
      EXIT.io,
    )
  }
}
