import { type Command, InvalidArgumentError } from 'commander'
import { pino } from 'pino'
import { startPool } from '../daemon/pool.ts'
import { type Reanalysed, reanalysable, reanalyse } from '../daemon/reanalyse.ts'
import { roomOf } from '../daemon/room.ts'
import { openStoreBeside, storeOn } from '../store/index.ts'
import { type DecisionOptions, refusal, withWho } from './decision.ts'
import { printLine, usageFault } from './print.ts'
import { printable } from './printable.ts'
import { progressLine } from './progressLine.ts'

interface Options extends DecisionOptions {
  readonly instrument?: string
  readonly all?: true
  readonly keepRecipe?: true
  readonly bands?: number
}

/** `tendq reanalyse`: stored spectra fitted again, deliberately and with a reason; the old analyses stay. */
export const addReanalyse = (program: Command): void => {
  withWho(program.command('reanalyse'))
    .summary('fit stored spectra again, after a change of recipe or engine')
    .description(
      'Fits the stored spectra of samples again: with a recipe chosen anew on the reference, or with the one in force (--keep-recipe). The old analyses stay. The reference is refitted with the rest, so that like is compared with like; no alarm is raised by it.',
    )
    .argument('[sample...]', 'samples; a sample that others are compared with takes these along')
    .option('--all', 'every sample that a study claims')
    .option('--instrument <name>', 'only on this instrument')
    .option('--keep-recipe', 'the recipe in force, by the engine of today')
    .option('--bands <n>', 'exactly this many d-d bands in the new recipe', bandCount)
    .addHelpText(
      'after',
      `
Example:
  tendq reanalyse AGE40-1 --by Ines --why "the species says now that the first band is skewed"
  tendq reanalyse --all --keep-recipe --by Ines --why "engine 0.2 after the upgrade"`,
    )
    .action((samples: string[], options: Options) => reanalyseSamples(samples, options))
}

const bandCount = (text: string): number => {
  const n = Number(text)
  if (!Number.isInteger(n) || n < 1 || n > 8) throw new InvalidArgumentError('a whole number from 1 to 8')
  return n
}

const reanalyseSamples = async (samples: readonly string[], options: Options): Promise<void> => {
  if (samples.length === 0 && options.all === undefined)
    throw usageFault('SAMPLE', 'which samples', 'name them, or say --all')
  for (const [option, value] of Object.entries({ '--by': options.by, '--why': options.why }))
    if (value.trim() === '') throw usageFault(option, 'it is empty', 'a reanalysis is kept with who and why')
  const room = roomOf(options.config)
  const store = storeOn(openStoreBeside(room.config.dataFolder))
  const pool = startPool()
  const stations = { store, pool, log: pino({ level: 'silent' }), now: () => Date.now(), room: () => room }
  const line = progressLine()
  try {
    const places = placesAsked(samples, options, reanalysable(stations), (sample) => {
      const reference = room.studyOf(sample)?.reference
      return reference?.kind === 'sample' ? reference.sample : null
    })
    for (const place of places) {
      const outcome = await reanalyse(
        { ...place, recipe: options.keepRecipe ? 'keep' : 'new', bands: options.bands ?? null, ...options },
        stations,
        (done, total) => line.show(`${place.sample} on ${place.instrument}: ${done} of ${total} spectra`),
      )
      line.clear()
      report(place, outcome)
    }
  } finally {
    line.clear()
    await pool.stop()
    store.close()
  }
}

interface Place {
  readonly sample: string
  readonly instrument: string
}

const placesAsked = (
  samples: readonly string[],
  { all, instrument }: Options,
  known: readonly Place[],
  comparedWith: (sample: string) => string | null,
): readonly Place[] => {
  for (const sample of samples)
    if (!known.some((place) => place.sample === sample))
      throw refusal(
        sample,
        'no spectrum of this sample is stored, or no study claims it',
        '`tendq status` tells what is stored',
      )
  const isAsked = ({ sample }: Place) => {
    const other = comparedWith(sample)
    return all === true || samples.includes(sample) || (other !== null && samples.includes(other))
  }
  const places = known.filter((place) => isAsked(place) && (instrument ?? place.instrument) === place.instrument)
  if (places.length === 0)
    throw refusal(instrument ?? 'reanalyse', 'nothing to reanalyse', '`tendq status` tells what is stored')
  return places
}

const report = ({ sample, instrument }: Place, outcome: Reanalysed): void => {
  const at = `${printable(sample)} on ${printable(instrument)}`
  if (outcome.kind === 'refused') throw refusal(at, outcome.why, outcome.remedy)
  const { spectra, recipe, isNew } = outcome
  printLine(
    `${at}: ${spectra} ${spectra === 1 ? 'spectrum' : 'spectra'} fitted with ${isNew ? 'the new recipe' : 'the recipe as before,'} ${recipe}`,
  )
}
