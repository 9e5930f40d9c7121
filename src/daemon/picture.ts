import { ENGINE } from '../analysis/types.ts'
import { labelOf, sayUnit } from '../mail/figures.ts'
import { oneLine } from '../mail/plain.ts'
import type { AlarmFacts, LetterFacts, LetterPicture } from '../mail/types.ts'
import { renderPng } from '../pictures/png.ts'
import { drawTrend, type Picture } from '../pictures/trend.ts'
import { limitsOf } from '../rules/limits.ts'
import type { Evidence } from '../rules/types.ts'
import { type Subject, subjectOf } from './context.ts'
import { occasionsOfRows } from './occasions.ts'
import type { Stations } from './pipeline.ts'
import { windowOf } from './window.ts'

/** Occasions that a picture shows. */
const SHOWN = 60
/** Spectra that they may be made of. */
const MOST_SPECTRA = 300

/**
 * The trend of what moved, up to the spectrum that the letter tells of; null where the letter is about nothing that has a trend.
 * Made at sending. Whatever goes wrong with it, the letter goes.
 */
export const pictureFor = async (facts: LetterFacts, stations: Stations): Promise<LetterPicture | null> => {
  if (facts.kind !== 'alarm' || facts.of !== 'sample') return null
  try {
    const picture = trendOf(facts, stations)
    if (picture === null) return null
    const rendering = await renderPng(picture.svg)
    if (rendering.kind === 'failed') {
      stations.log.warn(
        { alarm: facts.alarm, why: rendering.why },
        'a picture could not be rendered, the letter goes without',
      )
      return rendering
    }
    const cid = `trend.${facts.alarm}@tendq`
    return { kind: 'drawn', cid, png: rendering.png, alt: picture.description, widthPx: picture.widthPx }
  } catch (error) {
    stations.log.warn({ alarm: facts.alarm, err: error }, 'a picture could not be drawn, the letter goes without')
    return { kind: 'failed', why: error instanceof Error ? error.message : String(error) }
  }
}

/** The first figure of the letter that was measured. */
const movedOf = ({ evidence }: AlarmFacts): Evidence | null =>
  evidence.find(({ value, u }) => value !== null && u !== null) ?? null

const trendOf = (facts: AlarmFacts, stations: Stations): Picture | null => {
  const { store, room } = stations
  const { config, rules, studyOf } = room()
  const moved = movedOf(facts)
  const instrument = config.instruments?.find(({ name }) => name === facts.instrument)
  if (moved === null || instrument === undefined || facts.measuredAt === null) return null
  const subject = subjectOf(facts.subject, instrument, studyOf, config)
  if (subject === null) return null
  const until = Date.parse(facts.measuredAt)
  const rang = new Set(
    store.judgements
      .decidedBefore({ rule: facts.rule, sample: facts.subject, instrument: instrument.name }, until + 1, SHOWN)
      .filter(({ outcome }) => outcome === 'rings')
      .map(({ occasion }) => occasion),
  )
  const points = occasionsUntil(until, subject, stations).flatMap(({ at, values, u }) => {
    const value = values[moved.name] ?? null
    return value === null ? [] : [{ at, value, u: u[moved.name] ?? null, rang: rang.has(at) }]
  })
  if (points.length === 0) return null
  const rule = rules.find(({ definition }) => definition.name === facts.rule)
  const recipe = store.recipes.of(facts.subject, instrument.name)?.sha256 ?? null
  const limits =
    rule === undefined ? null : limitsOf(rule, windowOf(subject, recipe, until, [rule], stations), moved.name)
  return drawTrend({
    title: oneLine(facts.subject, 52),
    quantity: `${labelOf(moved.name)}${sayUnit(moved.unit) === '' ? '' : ` /${sayUnit(moved.unit)}`}`,
    points,
    reference: moved.reference === null ? null : { value: moved.reference, u: moved.uReference },
    limits: [limits?.below ?? null, limits?.above ?? null].filter((limit) => limit !== null),
  })
}

const occasionsUntil = (until: number, subject: Subject, { store }: Stations) => {
  const { sample, instrument } = subject
  const recipe = store.recipes.of(sample, instrument.name)?.sha256 ?? null
  const rows = store.analyses.window(
    { sample, instrument: instrument.name, recipe, engine: ENGINE },
    until,
    MOST_SPECTRA,
  )
  return occasionsOfRows(rows, subject, store).slice(-SHOWN)
}
