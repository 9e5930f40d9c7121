import { nmOfWavenumber } from '../spectrum/index.ts'
import {
  isPlain,
  LENGTH,
  PLAIN,
  product,
  raised,
  sameDimension,
  sayDimension,
  TIME,
  unitOf,
  WAVENUMBER,
} from './dimension.ts'
import { common, type Notes, type NumberPart, number, Refusal, reach, scaleOf, unitRefusal } from './parts.ts'
import type { Tree } from './tree.ts'
import { FUNCTIONS, NAMES } from './vocabulary.ts'
import * as windows from './windows.ts'

/** Windows hold occasions that have the value; so many more are asked for, that some may lack it. */
const withRoomForGaps = (n: number): number => 4 * n + 16

/** A function of the language on its arguments. */
export const call = (tree: Tree & { kind: 'call' }, notes: Notes): NumberPart => {
  const { name, parts, at } = tree
  const [least, most] = FUNCTIONS.get(name)!
  if (parts.length < least || parts.length > most) {
    const wanted = least === most ? `${least}` : `${least} to ${most}`
    throw new Refusal(
      'rule-arguments',
      at,
      `${name} takes ${wanted} argument${most === 1 ? '' : 's'}, ${parts.length} given`,
      'see docs/rules.md',
    )
  }
  const first = parts[0]!
  switch (name) {
    case 'absorbance': {
      const series = oneSeries(tree, notes, name)
      return number(PLAIN, 'difference', windows.current(series))
    }
    case 'wavelength':
      return wavelength(first, notes)
    case 'u': {
      const series = measured(first, notes, name)
      return number(series.dimension, 'difference', windows.uncertaintyOf(series))
    }
    case 'reference': {
      const series = measured(first, notes, name)
      return number(series.dimension, scaleOf(series), windows.referenceOf(series, 'value'))
    }
    case 'u_reference': {
      const series = measured(first, notes, name)
      return number(series.dimension, 'difference', windows.referenceOf(series, 'u'))
    }
    case 'previous': {
      const series = oneSeries(first, notes, name)
      reach(notes, withRoomForGaps(2))
      return number(series.dimension, scaleOf(series), windows.previousOf(series))
    }
    case 'mean':
    case 'median':
    case 'sd':
    case 'slope':
    case 'u_slope':
      return statistic(name, tree, notes)
    case 'count': {
      const how = reachOf(first, 1, name)
      reach(notes, how.kind === 'occasions' ? how.n : Infinity)
      return number(PLAIN, 'difference', windows.countOf(how))
    }
    case 'run_above':
    case 'run_below': {
      const series = oneSeries(first, notes, name)
      const level = notes.operand(parts[1]!, name)
      common(number(series.dimension, scaleOf(series), level.run), level, parts[1]!.at)
      reach(notes, Infinity)
      return number(PLAIN, 'difference', windows.runOf(name, series, level.run))
    }
    default:
      return mathematical(name as Mathematical, tree, notes)
  }
}

const statistic = (name: windows.Statistic, { parts }: Tree & { kind: 'call' }, notes: Notes): NumberPart => {
  const series = oneSeries(parts[0]!, notes, name)
  const how = reachOf(parts[1]!, { mean: 1, median: 1, sd: 2, slope: 2, u_slope: 3 }[name], name)
  reach(notes, how.kind === 'occasions' ? withRoomForGaps(how.n) : Infinity)
  const rate = name === 'slope' || name === 'u_slope'
  const dimension = rate ? product(series.dimension, TIME, -1) : series.dimension
  const scale = name === 'mean' || name === 'median' ? scaleOf(series) : 'difference'
  return number(dimension, scale, windows.statisticOf(name, series, how))
}

const wavelength = (tree: Tree, notes: Notes): NumberPart => {
  const { dimension, run } = notes.operand(tree, 'wavelength')
  if (!sameDimension(dimension, WAVENUMBER))
    throw unitRefusal(
      tree.at,
      `wavelength needs a wavenumber, this is ${sayDimension(dimension)}`,
      'write wavelength(nu1)',
    )
  const cmPerNm = unitOf('nm')!.size
  return number(LENGTH, 'difference', (frame) => {
    const perCm = run(frame)
    return perCm > 0 ? nmOfWavenumber(perCm, frame.window.medium) * cmPerNm : Number.NaN
  })
}

/** `x` of the functions: one name or `absorbance(…)`, kept once for the evidence. */
export const oneSeries = (tree: Tree, notes: Notes, who: string): windows.Series => {
  const series =
    tree.kind === 'name'
      ? windows.seriesOfName(NAMES.get(tree.name)!)
      : tree.kind === 'call' && tree.name === 'absorbance' && tree.parts.length === 1
        ? windows.seriesOfAbsorbance(nanometres(tree.parts[0]!), PLAIN)
        : null
  if (series === null)
    throw new Refusal(
      'rule-arguments',
      tree.at,
      `${who} works on one name or absorbance(…)`,
      `name one quantity, such as nu1`,
    )
  const known = notes.series.get(series.name)
  if (known === undefined) notes.series.set(series.name, series)
  return known ?? series
}

const measured = (tree: Tree, notes: Notes, who: string): windows.Series => {
  const series = oneSeries(tree, notes, who)
  if (series.measured) return series
  throw new Refusal('rule-arguments', tree.at, `${series.name} has no ${who}`, 'name a measured quantity, such as nu1')
}

const nanometres = (tree: Tree): number => {
  if (tree.kind === 'quantity' && sameDimension(tree.dimension, LENGTH) && tree.value > 0)
    return Number((tree.value / unitOf('nm')!.size).toPrecision(12))
  throw unitRefusal(tree.at, 'absorbance needs a wavelength', 'write absorbance(575 nm)')
}

const MOST_OCCASIONS = 10_000

const reachOf = (tree: Tree, least: number, who: string): windows.Reach => {
  if (tree.kind === 'number' && Number.isInteger(tree.value) && tree.value >= least && tree.value <= MOST_OCCASIONS)
    return { kind: 'occasions', n: tree.value }
  if (tree.kind === 'quantity' && sameDimension(tree.dimension, TIME) && tree.value > 0)
    return { kind: 'duration', ms: tree.value * 1000 }
  throw new Refusal(
    'rule-arguments',
    tree.at,
    `${who} reaches back over a whole number of occasions from ${least} to ${MOST_OCCASIONS}, or over a duration`,
    'write a number such as 5, or a duration such as 12 h',
  )
}

const plain = (tree: Tree, notes: Notes, who: string): NumberPart => {
  const part = notes.operand(tree, who)
  if (isPlain(part.dimension)) return part
  throw unitRefusal(
    tree.at,
    `${who} needs a plain number, this is in ${sayDimension(part.dimension)}`,
    'divide by a quantity of the same unit',
  )
}

type Mathematical = 'abs' | 'sqrt' | 'exp' | 'log' | 'log10' | 'min' | 'max'

const mathematical = (name: Mathematical, { parts, at }: Tree & { kind: 'call' }, notes: Notes): NumberPart => {
  if (name === 'min' || name === 'max') {
    const several = parts.map((part) => notes.operand(part, name))
    const choose = name === 'min' ? Math.min : Math.max
    return several.reduce((a, b) =>
      number(a.dimension, common(a, b, at), (frame) => choose(a.run(frame), b.run(frame))),
    )
  }
  const first = parts[0]!
  if (name === 'abs') {
    const of = notes.operand(first, name)
    return { ...of, run: (frame) => Math.abs(of.run(frame)) }
  }
  if (name === 'sqrt') {
    const of = notes.operand(first, name)
    return number(raised(of.dimension, 0.5), 'difference', (frame) => Math.sqrt(of.run(frame)))
  }
  const { run } = plain(first, notes, name)
  const apply = Math[name]
  return number(PLAIN, 'difference', (frame) => apply(run(frame)))
}
