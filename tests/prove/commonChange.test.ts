import { expect, test } from 'vitest'
import { commonParts, type Departure, scaleOf } from '../../src/series/commonChange.ts'
import { seeded } from '../series/random.ts'

/**
 * Twelve quiet samples, four rounds a day, ten years: how often would something be called common? Errors are Gaussian and
 * known; a share of each is the same for all samples of a round (the day's doing), the reference's error stays.
 */
const alarmsIn = (rounds: number, shared: number): number => {
  const { normal } = seeded(20260302)
  const quantities = ['nu1', 'nu2', 'max1', 'delta_o', 'height1']
  const reference = Array.from({ length: 12 }, () => quantities.map(() => normal() / Math.sqrt(5)))
  let alarms = 0
  let was = false
  for (let round = 0; round < rounds; round++) {
    const day = quantities.map(() => Math.sqrt(shared) * normal())
    const samples = reference.map((bias, i) => ({
      sample: `S${i}`,
      control: false,
      departures: Object.fromEntries(
        quantities.map((name, q): [string, Departure] => [
          name,
          [day[q]! + Math.sqrt(1 - shared) * normal() - bias[q]!, Math.sqrt(1.2)],
        ]),
      ),
    }))
    const positions = commonParts(samples).filter(({ quantity }) => scaleOf(quantity) === 'nm')
    const is =
      positions.some(({ standing }) => standing === 'rings') ||
      (was && positions.some(({ standing }) => standing === 'holds'))
    if (is && !was) alarms++
    was = is
  }
  return alarms
}

test('twelve quiet samples, four rounds a day for ten years, raise at most one false alarm a year, whatever part of the error a day shares', () => {
  const rounds = 4 * 365 * 10
  const counts = [0, 0.25, 0.5, 1].map((shared) => alarmsIn(rounds, shared))
  console.log(`false common changes in ten years at shared parts 0, 0.25, 0.5, 1: ${counts.join(', ')}`)
  for (const count of counts) expect(count).toBeLessThanOrEqual(10)
})
