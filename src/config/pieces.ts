/**
 * What the schemas are built from. The YAML reader hands over text, lists and mappings only; here text becomes numbers,
 * times and quantities. A fault carries its remedy in `params`, and `meta` says how the piece looks in the published JSON
 * Schema, where editors see YAML's own numbers and truth values.
 */
import { z } from 'zod'
import { type Dimension, exampleOf, parseQuantity, unitsOf } from './quantity.ts'
import { faultOfZone, parseTime, TIME_PATTERN } from './time.ts'

interface Trouble {
  readonly what: string
  readonly remedy: string
}

/** A custom issue in the form that `issues.ts` turns into a fault. */
export const troubleIssue = (input: unknown, { what, remedy }: Trouble, path: PropertyKey[] = []) =>
  ({ code: 'custom', input, path, message: what, params: { remedy } }) as const

type Read<T> = { readonly kind: 'read'; readonly value: T } | ({ readonly kind: 'refused' } & Trouble)

/** Text that becomes something else, or is refused with a remedy. */
const fromText = <T>(read: (text: string) => Read<T>) =>
  z.string().transform((text, context): T => {
    const reading = read(text)
    if (reading.kind === 'read') return reading.value
    context.issues.push({ ...troubleIssue(text, reading) })
    return z.NEVER
  })

const refused = (what: string, remedy: string): Read<never> => ({ kind: 'refused', what, remedy })
const read = <T>(value: T): Read<T> => ({ kind: 'read', value })

/** Any text but none. */
export const text = () =>
  fromText((written) =>
    written.trim() === '' ? refused('no value', 'write one, or delete the key') : read(written.trim()),
  ).meta({ type: 'string', minLength: 1 })

const NAME = /^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$/

/** Name of an instrument, species, study, rule or standard: what commands, letters and file names can carry. */
export const name = () =>
  fromText((written) =>
    NAME.test(written)
      ? read(written)
      : refused(
          written === '' ? 'no name' : `"${written}" is no name`,
          'use up to 64 letters, digits, dots, hyphens and underscores, beginning with a letter or digit',
        ),
  ).meta({ type: ['string', 'number'], pattern: NAME.source })

// biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what it looks for
const UNFIT = /[\u0000-\u001f\u007f]|^\s|\s$/

/** Name of a sample as files carry it: anything that can be seen. With `wildcards`, `*` and `?` may stand in it. */
export const sampleName = (wildcards: 'wildcards' | 'exact') =>
  fromText((written) => {
    if (written === '') return refused('no sample name', 'write one')
    if (UNFIT.test(written)) return refused('the sample name holds a control character', 'take it out')
    if (wildcards === 'exact' && /[*?]/.test(written))
      return refused(`"${written}" holds a wildcard`, 'name exactly one sample here')
    return read(written)
  }).meta({ type: ['string', 'number'] })

/** One of a few words. */
export const word = <const W extends readonly [string, ...string[]]>(words: W) => z.enum(words)

/** `true` or `false`. */
export const flag = () =>
  z
    .enum(['true', 'false'])
    .transform((written) => written === 'true')
    .meta({ type: 'boolean', enum: [true, false] })

interface Bounds {
  readonly least?: number
  readonly most?: number
  /** The bound `least` itself is refused. */
  readonly above?: boolean
  readonly whole?: boolean
}

const within = (value: number, written: string, { least, most, above, whole }: Bounds): Trouble | null => {
  if (whole === true && !Number.isInteger(value))
    return { what: `"${written}" is no whole number`, remedy: 'write one' }
  if (least !== undefined && (value < least || (above === true && value === least)))
    return {
      what: `${written} is too small`,
      remedy: above ? `it must be more than ${least}` : `the least is ${least}`,
    }
  if (most !== undefined && value > most) return { what: `${written} is too large`, remedy: `the most is ${most}` }
  return null
}

/** A plain number. */
export const number = (bounds: Bounds = {}) =>
  fromText((written) => {
    const reading = parseQuantity(written, 'number')
    if (reading.kind === 'refused') return reading
    const trouble = within(reading.value, written, bounds)
    return trouble === null ? read(reading.value) : { kind: 'refused', ...trouble }
  }).meta({
    type: bounds.whole === true ? 'integer' : 'number',
    ...(bounds.least === undefined ? {} : { [bounds.above === true ? 'exclusiveMinimum' : 'minimum']: bounds.least }),
    ...(bounds.most === undefined ? {} : { maximum: bounds.most }),
  })

/** A count, from 1. */
export const count = (most?: number) => number({ least: 1, whole: true, ...(most === undefined ? {} : { most }) })

/** The sign a quantity may have: `positive` refuses zero. */
type Sign = 'any' | 'from-zero' | 'positive'

const signed = (value: number, written: string, sign: Sign): Trouble | null => {
  if (sign === 'any' || value > 0 || (sign === 'from-zero' && value === 0)) return null
  return {
    what: `"${written}" is too small`,
    remedy: sign === 'positive' ? 'it must be more than zero' : 'zero is the least',
  }
}

const quantityMeta = (dimension: Dimension) => ({
  type: 'string' as const,
  pattern: `^\\s*[+-]?(\\d+\\.?\\d*|\\.\\d+)([eE][+-]?\\d+)?\\s*(${unitsOf(dimension)
    .map((unit) => unit.replace(/[\^/]/g, '\\$&'))
    .join('|')})\\s*$`,
  examples: [exampleOf(dimension)],
})

/** A quantity with its unit, handed on in the dimension's own unit (`quantity.ts`). */
export const quantity = (dimension: Exclude<Dimension, 'spectral' | 'number'>, sign: Sign) =>
  fromText((written) => {
    const reading = parseQuantity(written, dimension)
    if (reading.kind === 'refused') return reading
    const trouble = signed(reading.value, written, sign)
    return trouble === null ? read(reading.value) : { kind: 'refused', ...trouble }
  }).meta(quantityMeta(dimension))

/** A place on the spectral axis, or a distance along it, as written: nm (in air) or cm⁻¹ (vacuum). */
export const spectral = () =>
  fromText((written) => {
    const reading = parseQuantity(written, 'spectral')
    if (reading.kind === 'refused') return reading
    const trouble = signed(reading.value, written, 'positive')
    return trouble === null
      ? read({ value: reading.value, unit: reading.unit as 'nm' | 'cm^-1' })
      : { kind: 'refused', ...trouble }
  }).meta(quantityMeta('spectral'))

/** A time with its offset, handed on in epoch milliseconds. */
export const time = () =>
  fromText((written) => {
    const reading = parseTime(written)
    return reading.kind === 'read' ? read(reading.ms) : reading
  }).meta({ type: 'string', pattern: TIME_PATTERN, examples: ['2026-03-02T09:00:00Z'] })

const CLOCK = /^([01]\d|2[0-3]):[0-5]\d$/

/** A time of day, handed on in minutes after midnight. */
const minutesOf = (written: string): Read<number> =>
  CLOCK.test(written)
    ? read(Number(written.slice(0, 2)) * 60 + Number(written.slice(3)))
    : refused(`"${written}" is no time of day`, 'write hours and minutes, such as "07:00"')

/** A time of day by the clock of the room, in minutes after midnight. */
export const clock = () => fromText(minutesOf).meta({ type: 'string', pattern: CLOCK.source, examples: ['07:00'] })

/** A time of day, or `off`: null. */
export const dailyTime = () =>
  fromText((written): Read<number | null> => (written === 'off' ? read(null) : minutesOf(written))).meta({
    type: 'string',
    pattern: `^(off|${CLOCK.source.slice(1, -1)})$`,
    examples: ['07:00', 'off'],
  })

/** An IANA time zone. */
export const zone = () =>
  fromText((written) => {
    const trouble = faultOfZone(written)
    return trouble === null ? read(written) : { kind: 'refused', ...trouble }
  }).meta({ type: 'string', examples: ['Europe/Dublin'] })

const ADDRESS = /^[^\s@<>(),;:"]+@[^\s@<>(),;:"]+$/

/** A mail address without a display name. */
export const address = () =>
  fromText((written) =>
    ADDRESS.test(written)
      ? read(written)
      : refused(`"${written}" is no mail address`, 'write one as in keeper@lab.example, without a name before it'),
  ).meta({ type: 'string', pattern: ADDRESS.source })

/**
 * Lets a check of a whole mapping run beside faults of its parts, so that all are told at once; not where a key is
 * misspelt, for what seems to be missing may be what was meant.
 */
export const besideOthers = {
  when: ({ value, issues }: z.core.ParsePayload) =>
    typeof value === 'object' &&
    value !== null &&
    !Array.isArray(value) &&
    !issues.some(({ code }) => code === 'unrecognized_keys'),
}

/** A mapping with exactly one of its keys. All of them must be optional. */
export const oneOf = <S extends z.ZodRawShape>(shape: S) =>
  z
    .strictObject(shape)
    .superRefine((value, context) => {
      const keys = Object.keys(value).filter((key) => key in shape)
      if (keys.length === 1) return
      const what = keys.length === 0 ? 'nothing is chosen here' : `${keys.join(' and ')} exclude each other`
      context.issues.push({ ...troubleIssue(value, { what, remedy: `write one of ${Object.keys(shape).join(', ')}` }) })
    }, besideOthers)
    .meta({ minProperties: 1, maxProperties: 1 })

/** Where a secret is kept; the secret itself never stands in the configuration. */
export const secret = () =>
  oneOf({
    credential: name().optional().describe('Name of a systemd credential (LoadCredential=)'),
    env: name().optional().describe('Name of an environment variable'),
    file: text().optional().describe('Path of a file that holds it'),
  })
