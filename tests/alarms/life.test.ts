import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { stepAlarm, stepOutcome } from '../../src/alarms/index.ts'
import type { AlarmInput, AlarmLife, AlarmState } from '../../src/alarms/types.ts'

/**
 * Every state × every input, the state model of ANSI/ISA-18.2-2016 / IEC 62682 (states and transitions from memory).
 * A cell: the next state and the notice; `x` refused; `.` same state, nothing told. Active states have a condition that
 * is true, the others one that is false. First for alarms that do not latch, then for those that do.
 */
const STATES: Readonly<Record<string, AlarmState>> = {
  A: 'normal',
  B: 'unacknowledged',
  C: 'acknowledged',
  D: 'returned-unacknowledged',
  E: 'latched-unacknowledged',
  F: 'latched-acknowledged',
  G: 'shelved',
  H: 'suppressed-by-design',
  I: 'out-of-service',
}
const INPUTS: readonly AlarmInput[] = [
  ...(['rings', 'clears', 'acknowledge', 'reset', 'shelve', 'unshelve', 'suppress', 'unsuppress'] as const),
  ...(['out-of-service', 'return-to-service', 're-alarm'] as const),
]
/** Columns as INPUTS; a second letter is the condition: `G+` shelved with the condition true. */
const TABLE = `
A   B:raised      .            x              x       G:shelved  x               H  x         I  x         x
B+  .             D:returned   C:acknowledged x       G:shelved  x               H  x         I  x         B:re-alarmed
C+  .             A:returned   x              x       G:shelved  x               H  x         I  x         B:re-alarmed
D   B:re-alarmed  .            A:acknowledged x       G:shelved  x               H  x         I  x         x
E   B:re-alarmed  .            F:acknowledged x       G:shelved  x               H  x         I  x         x
F   B:re-alarmed  .            x              A:reset G:shelved  x               H  x         I  x         x
G   .             .            x              x       G:shelved  A:unshelved     x  x         I  x         x
G+  .             .            x              x       G:shelved  B:unshelved     x  x         I  x         x
H   .             .            x              x       x          x               H  A         I  x         x
H+  .             .            x              x       x          x               H  B:raised  I  x         x
I   .             .            x              x       x          x               x  x         I  A         x
I+  .             .            x              x       x          x               x  x         I  B:raised  x`
const LATCHING: Readonly<Record<string, string>> = { 'B+ clears': 'E:returned', 'C+ clears': 'F:returned' }

const lifeIn = (state: string, latch: boolean): AlarmLife => {
  const active = state.endsWith('+')
  return { state: STATES[state[0]!]!, active, consecutive: active ? 3 : 0, latch }
}
const cells = TABLE.trim()
  .split('\n')
  .flatMap((row) => {
    const [state, ...results] = row.split(/\s+/)
    return results.map((result, i) => [state!, INPUTS[i]!, result] as const)
  })

describe.each([false, true])('the table of states and inputs, latching: %s', (latch) => {
  it.each(cells)('%s, %s → %s', (state, input, written) => {
    const life = lifeIn(state, latch)
    const result = (latch ? LATCHING[`${state} ${input}`] : undefined) ?? written
    const step = stepAlarm(life, input, 1)
    if (result === 'x') {
      expect(step.kind).toBe('refused')
      return
    }
    if (step.kind === 'refused') throw new Error(step.why)
    const [next, notice = 'none'] = result === '.' ? [state] : result.split(':')
    expect(step.life.state).toBe(STATES[next![0]!])
    expect(step.notice).toBe(notice)
    if (input === 'rings') expect(step.life.active).toBe(true)
    if (input === 'clears') expect(step.life).toMatchObject({ active: false, consecutive: 0 })
    if (input !== 'rings' && input !== 'clears') expect(step.life.active).toBe(life.active)
  })
  it('covers every state and input', () => {
    expect(cells.length).toBe(12 * INPUTS.length)
    expect(new Set(cells.map(([state]) => STATES[state[0]!])).size).toBe(9)
  })
})

const after = (life: AlarmLife, persist: number, ...inputs: readonly (AlarmInput | 'holds' | 'undecided')[]) => {
  const notices: string[] = []
  const end = inputs.reduce((now, input) => {
    const step = ['rings', 'clears', 'holds', 'undecided'].includes(input)
      ? stepOutcome(now, input as 'rings' | 'clears' | 'holds' | 'undecided', persist)
      : stepAlarm(now, input as AlarmInput, persist)
    if (step.kind === 'refused') throw new Error(step.why)
    if (step.notice !== 'none') notices.push(step.notice)
    return step.life
  }, life)
  return { ...end, notices }
}
const quiet = lifeIn('A', false)
const latching = lifeIn('A', true)

describe('persist', () => {
  it('an alarm rings at the third of three consecutive occasions, not before', () => {
    expect(after(quiet, 3, 'rings', 'rings')).toMatchObject({ state: 'normal', consecutive: 2, notices: [] })
    expect(after(quiet, 3, 'rings', 'rings', 'rings')).toMatchObject({ state: 'unacknowledged', notices: ['raised'] })
  })
  it('one good occasion, or one inside the deadband, starts the count anew', () => {
    expect(after(quiet, 2, 'rings', 'clears', 'rings').state).toBe('normal')
    expect(after(quiet, 2, 'rings', 'holds', 'rings').state).toBe('normal')
  })
  it('an undecided occasion neither adds nor resets', () => {
    expect(after(quiet, 2, 'rings', 'undecided', 'rings').state).toBe('unacknowledged')
    expect(after(quiet, 2, 'rings', 'undecided').consecutive).toBe(1)
  })
  it('holds between clear and when as it is', () => {
    expect(after(quiet, 1, 'rings', 'holds')).toMatchObject({ state: 'unacknowledged', active: true, consecutive: 1 })
  })
  it('counts again after a return', () => {
    const returned = after(quiet, 2, 'rings', 'rings', 'clears', 'rings')
    expect(returned.state).toBe('returned-unacknowledged')
    expect(after(returned, 2, 'rings').state).toBe('unacknowledged')
  })
})

describe('silence', () => {
  it('follows the condition: what is still true when shelving ends is told', () => {
    expect(after(quiet, 2, 'shelve', 'rings', 'rings', 'unshelve')).toMatchObject({ state: 'unacknowledged' })
    expect(after(quiet, 2, 'rings', 'rings', 'shelve', 'clears', 'unshelve').state).toBe('normal')
  })
  it('does not make a latched alarm forget its reset', () => {
    expect(after(latching, 1, 'rings', 'shelve', 'clears', 'unshelve').state).toBe('latched-unacknowledged')
    expect(after(latching, 1, 'suppress', 'rings', 'clears', 'unsuppress').state).toBe('latched-unacknowledged')
    expect(after(latching, 1, 'rings', 'clears', 'acknowledge', 'out-of-service', 'return-to-service').state).toBe(
      'latched-unacknowledged',
    )
    expect(after(latching, 1, 'shelve', 'unshelve').state).toBe('normal')
    expect(
      after(latching, 1, 'rings', 'shelve', 'clears', 'unshelve', 'acknowledge', 'reset', 'shelve', 'unshelve').state,
    ).toBe('normal')
  })
  it('of one kind at a time: out of service ends shelving', () => {
    expect(after(quiet, 1, 'shelve', 'out-of-service', 'return-to-service').state).toBe('normal')
  })
})

it('whatever happens, state and condition agree, and a refusal says why', () => {
  const inputs = fc.array(fc.constantFrom(...INPUTS), { maxLength: 40 })
  fc.assert(
    fc.property(inputs, fc.boolean(), fc.integer({ min: 1, max: 4 }), (events, latch, persist) => {
      let life = lifeIn('A', latch)
      for (const event of events) {
        const step = stepAlarm(life, event, persist)
        if (step.kind === 'refused') {
          expect(step.why.length).toBeGreaterThan(5)
          continue
        }
        life = step.life
        if (['unacknowledged', 'acknowledged'].includes(life.state)) expect(life.active).toBe(true)
        if (/^(normal|returned|latched)/.test(life.state)) expect(life.active).toBe(false)
        if (life.state.startsWith('latched')) expect(latch).toBe(true)
        if (life.state.startsWith('returned')) expect(latch).toBe(false)
      }
    }),
    { numRuns: 500 },
  )
})
