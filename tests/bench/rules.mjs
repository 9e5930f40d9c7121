// Time per rule and spectrum on a stored history of 10,000 occasions, the window loaded once (design: at most 10 µs for
// an expression). `npm run bench -- rules`. Charts fold over the whole history and are shown apart.
import { compileRule } from '../../dist/rules/index.js'

const OCCASIONS = 10_000
const LIMIT_US = 10
const place = { at: 'rules/bench.yaml', line: 1, column: 1 }
const rule = (condition) => {
  const compilation = compileRule({
    ...{
      name: 'bench',
      title: 'Bench',
      of: 'sample',
      studies: ['*'],
      persist: 1,
      priority: 'low',
      latch: false,
      place,
    },
    condition,
  })
  if (compilation.kind === 'refused') throw new Error(JSON.stringify(compilation.faults))
  return compilation.rule
}
const expression = (when, clear = null) =>
  rule({ kind: 'expression', when: { text: when, place }, clear: clear && { text: clear, place } })
const chart = (kind) =>
  rule({ kind: 'chart', chart: kind, quantity: { text: 'delta_o', place }, k: 0.5, h: 8, lambda: 0.1, l: 3 })

const RULES = [
  'abs(nu1 - reference(nu1)) > max(4 * sqrt(u(nu1)^2 + u_reference(nu1)^2), 60 cm^-1)',
  'height1 < 0.9 * reference(height1) and nu1 > 19000 cm^-1',
  'scatter > 0.05 or rms > 5 * noise',
  'abs(nu1 - previous(nu1)) > 60 cm^-1',
  'abs(mean(nu1, 5) - reference(nu1)) > 20 cm^-1',
  'abs(slope(nu1, 10)) > 3 * u_slope(nu1, 10)',
  'sd(delta_o, 20) > 3 * u(delta_o)',
  'run_above(width1, reference(width1)) >= 8',
  'wavelength(nu1) > 519 nm',
  'temperature > 27 degC and age > 1 d',
]

// A quiet series with a small fixed ripple: the figures do not matter, only that every function has its data.
const names = ['nu1', 'delta_o', 'height1', 'width1', 'scatter', 'rms', 'noise']
const occasions = Array.from({ length: OCCASIONS }, (_, i) => ({
  at: i * 21_600_000,
  receivedAt: i * 21_600_000,
  spectra: [i],
  values: Object.fromEntries(names.map((name) => [name, 19_500 + ((i * 7919) % 13) - 6])),
  u: Object.fromEntries(names.map((name) => [name, 4])),
  absorbanceAt: () => null,
}))
const window = {
  occasions,
  reference: {
    ...{ kind: 'ready', occasions: 5, until: occasions[4].at, absorbanceAt: () => null },
    values: Object.fromEntries(names.map((name) => [name, 19_500])),
    u: Object.fromEntries(names.map((name) => [name, 2])),
  },
  ...{ began: 0, temperatureC: 25, pathMm: 10, concentrationMolPerL: 0.01, medium: 'air' },
}

const microseconds = (judge, times) => {
  for (let i = 0; i < times / 10; i++) judge(window)
  const begun = performance.now()
  for (let i = 0; i < times; i++) judge(window)
  return ((performance.now() - begun) * 1000) / times
}

export const run = async () => {
  let slowest = 0
  for (const when of RULES) {
    const us = microseconds(expression(when).judge, 20_000)
    slowest = Math.max(slowest, us)
    console.log(`${us.toFixed(2).padStart(8)} µs  ${when}`)
  }
  for (const kind of ['shewhart', 'ewma', 'cusum'])
    console.log(`${microseconds(chart(kind).judge, 50).toFixed(0).padStart(8)} µs  ${kind} over ${OCCASIONS} occasions`)
  console.log(`slowest expression ${slowest.toFixed(2)} µs a rule and spectrum, limit ${LIMIT_US}`)
  process.exitCode = slowest <= LIMIT_US ? 0 : 1
}
