import { expect, it } from 'vitest'
import { growthOver } from './memory.ts'

it('memory stays flat over 20,000 fits', () => {
  expect(growthOver(20_000)).toBeLessThan(4e6)
}, 60_000)
