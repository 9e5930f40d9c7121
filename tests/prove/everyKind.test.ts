/** Coverage of ν1, ν2, Δo, B and of differences over made-up exports of many kinds, through the whole analysis. */
import { expect, it } from 'vitest'
import { type Checked, KINDS, sampleOf, TELLING } from '../bands/everyKind.ts'

/** Samples of each kind; each has ten spectra. */
const SAMPLES = 30

const share = (checked: readonly Checked[]): number =>
  checked.filter(({ error, u }) => Math.abs(error) < 1.96 * u).length / checked.length

it(`over ${KINDS.length * SAMPLES * 10} spectra of ${KINDS.length} kinds the 95 % intervals cover the truth, and what is far off is flagged`, () => {
  const all: Checked[] = []
  const others: Record<string, number> = {}
  for (const kind of KINDS)
    for (let i = 0; i < SAMPLES; i++) {
      const { checked, other } = sampleOf(kind, 1000 * KINDS.indexOf(kind) + i)
      all.push(...checked)
      others[kind] = (others[kind] ?? 0) + other
    }
  const quantities = [...new Set(all.map(({ quantity }) => quantity))]
  const table = KINDS.map((kind) => ({
    kind,
    other: others[kind],
    ...Object.fromEntries(
      quantities.map((quantity) => [
        quantity,
        share(all.filter((one) => one.kind === kind && one.quantity === quantity)).toFixed(3),
      ]),
    ),
  }))
  console.table(table)
  const overall = Object.fromEntries(
    quantities.map((quantity) => [quantity, share(all.filter((one) => one.quantity === quantity))]),
  )
  console.log(overall)
  const far = all.filter(
    ({ error, u, flags }) => Math.abs(error) > Math.max(60, 4 * u) && !flags.some((flag) => TELLING.includes(flag)),
  )
  console.log('far off without a flag', far.length, far.slice(0, 10))
  expect(far).toEqual([])
  for (const quantity of quantities) {
    expect(overall[quantity], quantity).toBeGreaterThan(0.93)
    expect(overall[quantity], quantity).toBeLessThan(0.97)
  }
})
