import type { AlarmInput, AlarmLife, AlarmNotice, AlarmState, AlarmStep } from './types.ts'

/**
 * The life of one alarm, after the state model of ANSI/ISA-18.2 and IEC 62682: A normal, B unacknowledged,
 * C acknowledged, D returned unacknowledged, E latched unacknowledged, F latched acknowledged, G shelved,
 * H suppressed by design, I out of service. A→B when the condition sets in; B→C acknowledge; B→D, C→A when it returns
 * (latching: B→E, C→F); D→A, E→F acknowledge; F→A reset; D, E, F→B when it sets in again; C→B re-alarm. G, H and I are
 * entered by a person or by logic; while there the condition is followed, and on leaving the alarm shows what is so.
 *
 * Two states of silence never stack: what is shelved is not also suppressed, what is out of service neither.
 */
export const NORMAL_LIFE: Omit<AlarmLife, 'latch'> = { state: 'normal', active: false, consecutive: 0 }

/** One step. `persist` is the number of consecutive occasions before a rule's ringing becomes an alarm. Pure. */
export const stepAlarm = (life: AlarmLife, input: AlarmInput, persist: number): AlarmStep => {
  switch (input) {
    case 'rings':
      return ring(life, persist)
    case 'clears':
      return clear(life)
    default:
      return BY_HAND[input](life)
  }
}

/**
 * What a rule's outcome does to an alarm. Undecided neither adds nor resets; `holds` (between clear and when) keeps an
 * alarm as it is, but breaks a row of occasions that has not yet become one.
 */
export const stepOutcome = (
  life: AlarmLife,
  outcome: 'rings' | 'clears' | 'holds' | 'undecided',
  persist: number,
): AlarmStep => {
  if (outcome === 'rings' || outcome === 'clears') return stepAlarm(life, outcome, persist)
  return stepped(outcome === 'holds' && !life.active ? { ...life, consecutive: 0 } : life, 'none')
}

const stepped = (life: AlarmLife, notice: AlarmNotice): AlarmStep => ({ kind: 'stepped', life, notice })
const refused = (why: string): AlarmStep => ({ kind: 'refused', why })
const to = (life: AlarmLife, state: AlarmState, notice: AlarmNotice): AlarmStep => stepped({ ...life, state }, notice)

const isSilenced = ({ state }: AlarmLife): boolean =>
  state === 'shelved' || state === 'suppressed-by-design' || state === 'out-of-service'

const ring = (before: AlarmLife, persist: number): AlarmStep => {
  const consecutive = before.consecutive + 1
  const active = before.active || consecutive >= persist
  const life = { ...before, consecutive, active }
  if (!active) return stepped(life, 'none')
  switch (before.state) {
    case 'normal':
      return to(life, 'unacknowledged', 'raised')
    case 'returned-unacknowledged':
    case 'latched-unacknowledged':
    case 'latched-acknowledged':
      return to(life, 'unacknowledged', 're-alarmed')
    case 'unacknowledged':
    case 'acknowledged':
      return stepped(life, 'none')
    default: // silenced: followed, not told
      return stepped(before.latch ? { ...life, latched: true } : life, 'none')
  }
}

const clear = (before: AlarmLife): AlarmStep => {
  const life = { ...before, consecutive: 0, active: false }
  switch (before.state) {
    case 'unacknowledged':
      return to(life, before.latch ? 'latched-unacknowledged' : 'returned-unacknowledged', 'returned')
    case 'acknowledged':
      return to(life, before.latch ? 'latched-acknowledged' : 'normal', 'returned')
    default:
      return stepped(life, 'none')
  }
}

const acknowledge = (life: AlarmLife): AlarmStep => {
  switch (life.state) {
    case 'unacknowledged':
      return to(life, 'acknowledged', 'acknowledged')
    case 'returned-unacknowledged':
      return to(life, 'normal', 'acknowledged')
    case 'latched-unacknowledged':
      return to(life, 'latched-acknowledged', 'acknowledged')
    case 'acknowledged':
    case 'latched-acknowledged':
      return refused('it is acknowledged already')
    default:
      return refused(`there is nothing to acknowledge: it is ${life.state}`)
  }
}

const reset = (life: AlarmLife): AlarmStep => {
  if (life.state === 'latched-acknowledged') return to(life, 'normal', 'reset')
  if (life.state === 'latched-unacknowledged') return refused('acknowledge it before it is reset')
  if (life.active) return refused('its condition still holds; it can be reset once that has cleared')
  return refused(`only a latched alarm is reset; it is ${life.state}`)
}

/** Enters a state of silence; a latched alarm remembers that it waits for its reset. */
const silence = (life: AlarmLife, state: AlarmState, notice: AlarmNotice): AlarmStep => {
  const latched = life.latch && (life.active || life.latched === true || life.state.startsWith('latched'))
  return stepped({ ...life, state, ...(latched ? { latched } : {}) }, notice)
}

/** Leaves a state of silence: the alarm shows what is so now, and wants to be acknowledged. */
const speak = (silenced: AlarmLife, notice: AlarmNotice, noticeIfActive: AlarmNotice): AlarmStep => {
  const { latched, ...life } = silenced
  if (life.active) return to(life, 'unacknowledged', noticeIfActive)
  return to(life, latched === true ? 'latched-unacknowledged' : 'normal', notice)
}

const BY_HAND: Readonly<Record<Exclude<AlarmInput, 'rings' | 'clears'>, (life: AlarmLife) => AlarmStep>> = {
  acknowledge,
  reset,
  /** Shelving again moves the end. */
  shelve: (life) =>
    life.state === 'suppressed-by-design' || life.state === 'out-of-service'
      ? refused(`it is ${life.state} and silent already`)
      : silence(life, 'shelved', 'shelved'),
  unshelve: (life) =>
    life.state === 'shelved' ? speak(life, 'unshelved', 'unshelved') : refused(`it is not shelved but ${life.state}`),
  suppress: (life) =>
    life.state === 'shelved' || life.state === 'out-of-service'
      ? refused(`it is ${life.state} and silent already`)
      : silence(life, 'suppressed-by-design', 'none'),
  unsuppress: (life) =>
    life.state === 'suppressed-by-design'
      ? speak(life, 'none', 'raised')
      : refused(`it is not suppressed but ${life.state}`),
  /** Taking out of service ends shelving and suppression. */
  'out-of-service': (life) => silence(life, 'out-of-service', 'none'),
  'return-to-service': (life) =>
    life.state === 'out-of-service' ? speak(life, 'none', 'raised') : refused(`it is in service: ${life.state}`),
  /** The condition persists and nobody has dealt with it: it wants attention again. */
  're-alarm': (life) =>
    life.state === 'acknowledged' || life.state === 'unacknowledged'
      ? to(life, 'unacknowledged', 're-alarmed')
      : refused(`its condition does not stand: ${isSilenced(life) ? 'it is silenced' : life.state}`),
}
