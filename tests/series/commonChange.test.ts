import { describe, expect, it } from 'vitest'
import {
  causeOfCommon,
  commonParts,
  type Departure,
  departuresOf,
  type SampleDepartures,
  withoutCommon,
} from '../../src/series/commonChange.ts'
import type { Occasion, ReferenceState } from '../../src/series/types.ts'

const one = (sample: string, departures: Record<string, Departure>, control = false): SampleDepartures => ({
  sample,
  control,
  departures,
})
const twelve = (d: (i: number) => Record<string, Departure>) =>
  Array.from({ length: 12 }, (_, i) => one(`S${i + 1}`, d(i)))
const partOf = (samples: readonly SampleDepartures[], quantity = 'nu1') =>
  commonParts(samples).find((part) => part.quantity === quantity)

describe('what samples did together', () => {
  it('is found when twelve samples moved by the same number of nm', () => {
    const part = partOf(twelve((i) => ({ nu1: [1 + 0.05 * (i % 3), 0.1] })))
    expect(part).toMatchObject({ standing: 'rings', byControls: false })
    expect(part!.together).toHaveLength(12)
    expect(part!.c).toBeCloseTo(1.05, 9) // the median of 1, 1.05, 1.1, four of each
  })

  it('leaves out a sample that departs, and is not pulled along by it', () => {
    const part = partOf(twelve((i) => ({ nu1: i === 4 ? [9, 0.1] : [1, 0.1] })))
    expect(part!.standing).toBe('rings')
    expect(part!.c).toBe(1)
    expect(part!.together).not.toContain('S5')
  })

  it('is nothing where each went its own way, or where too few are there to tell', () => {
    expect(partOf(twelve((i) => ({ nu1: [i - 5.5, 0.1] })))!.standing).toBe('clears')
    expect(partOf(twelve(() => ({ nu1: [1, 0.1] })).slice(0, 2))).toBeUndefined()
  })

  it('does not become more certain with more samples: what a day shares is no change', () => {
    // u of the common part is that of one sample: 3 u of twelve samples does not ring
    expect(partOf(twelve(() => ({ nu1: [0.3, 0.1] })))!.standing).toBe('holds')
    expect(partOf(twelve(() => ({ nu1: [0.2, 0.1] })))!.standing).toBe('clears')
  })

  it('is what the control does, where there is one: samples that age alike beside a steady control share nothing', () => {
    const aged = twelve(() => ({ nu1: [3, 0.1] }))
    expect(partOf([...aged, one('C', { nu1: [0.05, 0.1] }, true)])!.standing).toBe('clears')
    const moved = partOf([...aged, one('C', { nu1: [2, 0.1] }, true)])
    expect(moved).toMatchObject({ standing: 'rings', c: 2, byControls: true })
  })

  it('is not the doing of the room when the control moved alone', () => {
    const quiet = twelve(() => ({ nu1: [0, 0.1] }))
    expect(partOf([...quiet, one('C', { nu1: [2, 0.1] }, true)])!.standing).toBe('clears')
  })

  it('cannot be told while a control is named and says nothing', () => {
    expect(partOf([...twelve(() => ({ nu1: [2, 0.1] })), one('C', {}, true)])).toBeUndefined()
  })
})

const occasion = (values: Record<string, number>, at = 10): Occasion => ({
  at,
  receivedAt: at,
  spectra: [1],
  values,
  u: Object.fromEntries(Object.keys(values).map((name) => [name, name.startsWith('nu') ? 2 : 0.001])),
  absorbanceAt: () => null,
})
const REFERENCE: ReferenceState = {
  kind: 'ready',
  values: { nu1: 20000, height1: 0.5 },
  u: { nu1: 1, height1: 0.0005 },
  occasions: 4,
  until: 5,
  absorbanceAt: () => null,
}

describe('the departure of a sample', () => {
  it('is in nm for positions and in logarithms for heights, with the uncertainty of both sides', () => {
    const departures = departuresOf(occasion({ nu1: 19960, height1: 0.55 }), REFERENCE)
    // 1e7/19960 − 1e7/20000 nm; u = √(max(2, 1·√4)² + 1²)·1e7/20000² = 0.0559 nm
    expect(departures.nu1![0]).toBeCloseTo(501.002004 - 500, 6)
    expect(departures.nu1![1]).toBeCloseTo((Math.sqrt(5) * 1e7) / 20000 ** 2, 9)
    expect(departures.height1![0]).toBeCloseTo(Math.log(1.1), 12)
  })

  it('is taken out again to see what the sample did by itself', () => {
    const moved = [occasion({ nu1: 19990 }, 3), occasion({ nu1: 19960, height1: 0.55 }, 10)]
    const departures = departuresOf(moved[1]!, REFERENCE)
    const parts = commonParts(['A', 'B', 'C'].map((name) => one(name, departures)))
    const own = withoutCommon(moved, parts, 5)
    expect(own[0]!.values.nu1).toBe(19990) // before the change
    expect(own[1]!.values.nu1).toBeCloseTo(20000, 6)
    expect(own[1]!.values.height1).toBeCloseTo(0.5, 9)
  })
})

describe('the likely cause', () => {
  const cause = (departures: Record<string, Departure>) =>
    causeOfCommon(commonParts(twelve(() => departures))).diagnosis
  it('is the wavelength axis when all bands moved by as many nm and no width changed', () => {
    expect(cause({ nu1: [1, 0.1], nu2: [1.02, 0.1], width1: [0, 0.01] })).toBe('wavelength')
  })
  it('is the temperature when bands went to the red and became broader (common knowledge of d-d bands, from memory)', () => {
    expect(cause({ nu1: [1, 0.1], nu2: [0.6, 0.1], width1: [0.1, 0.01], width2: [0.08, 0.01] })).toBe('temperature')
  })
  it('is cell, blank or lamp when heights changed and no band moved', () => {
    expect(cause({ nu1: [0, 0.1], nu2: [0, 0.1], height1: [-0.1, 0.005], height2: [-0.1, 0.005] })).toBe('optics')
  })
  it('stays unclear with one band, or with shifts that differ', () => {
    expect(cause({ nu1: [1, 0.1] })).toBe('unclear')
    expect(cause({ nu1: [3, 0.1], nu2: [-1, 0.1] })).toBe('unclear')
  })
})
