/**
 * Band fitting: one spectrum of 601 points, three Gaussians, constant and scatter, cold start; and a whole analysis.
 * Compared in the same run with ml-levenberg-marquardt and, where Python has it, SciPy's curve_fit with an analytic Jacobian.
 */
import { execFileSync } from 'node:child_process'
import { levenbergMarquardt } from 'ml-levenberg-marquardt'
import { analyse } from '../../dist/analysis/index.js'
import { fitBands } from '../../dist/bands/index.js'
import { separable } from '../../dist/bands/separable.js'
import { solveRecipe } from '../../dist/bands/solveRecipe.js'
import { findIon } from '../../dist/chemistry/ions.js'

const FOUR_LN2 = 4 * Math.LN2
const TRUTH = [
  [17400, 3600, 0.5],
  [24600, 3900, 0.6],
  [30500, 4200, 0.4],
]
const STARTS = [16800, 3200, 25300, 3200, 31200, 3600]
const NOISE = 0.001

const generator = (seed) => {
  let state = seed >>> 0
  return () => {
    state = (state + 0x6d2b79f5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

const simulate = (points) => {
  const random = generator(1)
  const normal = () => Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random())
  const x = Float64Array.from({ length: points }, (_, i) => 1e7 / (900 - (600 * i) / (points - 1)))
  const curve = (v) =>
    TRUTH.reduce((s, [p, w, h]) => s + h * Math.exp(-FOUR_LN2 * ((v - p) / w) ** 2), 0.01 + 0.02 * (v / 22222) ** 4)
  return {
    wavenumberPerCm: x,
    absorbance: x.map((v) => curve(v) + NOISE * normal()),
    noise: new Float64Array(points).fill(NOISE),
    used: new Uint8Array(points).fill(1),
    ordinate: 'absorbance',
    medium: 'vacuum',
    pathMm: 10,
    flags: [],
    remarks: [],
  }
}

const recipeFor = (x) => ({
  name: '3 gaussian + constant + scatter',
  components: [0, 1, 2].map((k) => ({
    shape: { kind: 'gaussian' },
    kind: 'band',
    positionPerCm: STARTS[2 * k],
    positionBoundsPerCm: [STARTS[2 * k] - 2500, STARTS[2 * k] + 2500],
    widthPerCm: STARTS[2 * k + 1],
    widthBoundsPerCm: [1200, 7000],
  })),
  background: [{ kind: 'constant' }, { kind: 'scatter', exponent: 4 }],
  windowPerCm: [x[0], x[x.length - 1]],
})

const rawOf = ({ wavenumberPerCm, absorbance }) => ({
  index: 0,
  x: wavenumberPerCm,
  y: absorbance,
  xUnit: 'cm^-1',
  medium: 'vacuum',
  yKind: 'absorbance',
  ...{ sample: null, title: null, time: null, pathMm: null, temperatureC: null, concentrationMolPerL: null },
  header: {},
  warnings: [],
})

const CONTEXT = {
  prepare: { medium: 'air', absorbanceLimit: 3, bandwidthNm: 1 },
  ion: findIon('Cr3+').ion,
  geometry: 'octahedral',
  spin: null,
  expected: [],
  bands: null,
  repeatabilityNm: null,
}

/** Median milliseconds of one call, over `rounds` batches. */
const time = (call, batch, rounds = 15, warmUp = 3 * batch) => {
  for (let i = 0; i < warmUp; i++) call()
  const each = Array.from({ length: rounds }, () => {
    const from = performance.now()
    for (let i = 0; i < batch; i++) call()
    return (performance.now() - from) / batch
  })
  return each.sort((a, b) => a - b)[rounds >> 1]
}

const say = (label, ms, rest = '') => console.log(`  ${label.padEnd(52)} ${ms.toFixed(3).padStart(9)} ms ${rest}`)

const SCIPY = `
import json, sys, time, numpy as np
from scipy.optimize import curve_fit
d = json.load(sys.stdin); x = np.array(d['x']); y = np.array(d['y']); L = 4*np.log(2); x0 = d['x0']
def parts(p):
    for k in range(3):
        u = (x - p[3*k])/p[3*k+1]; yield k, u, np.exp(-L*u*u)
s4 = (x/x0)**4; one = np.ones_like(x)
def f(x, *p): return sum(p[3*k+2]*g for k, u, g in parts(p)) + p[9] + p[10]*s4
def jac(x, *p):
    cols = []
    for k, u, g in parts(p):
        h, w = p[3*k+2], p[3*k+1]; cols += [h*g*2*L*u/w, h*g*2*L*u*u/w, g]
    return np.stack(cols + [one, s4], axis=1)
sigma = np.full_like(x, d['noise'])
best = []
for i in range(60):
    t = time.perf_counter(); p, _ = curve_fit(f, x, y, d['start'], jac=jac, sigma=sigma, ftol=1e-9, xtol=1e-9, gtol=1e-9); best.append(time.perf_counter() - t)
print(json.dumps({'ms': 1e3*sorted(best)[30], 'chi2': float((((y - f(x, *p))/sigma)**2).sum())}))
`

const scipy = (spectrum, origin) => {
  const x = Array.from(spectrum.wavenumberPerCm)
  const start = [0, 1, 2].flatMap((k) => [STARTS[2 * k], STARTS[2 * k + 1], 0.5]).concat([0, 0.01])
  const input = JSON.stringify({ x, y: Array.from(spectrum.absorbance), x0: origin, noise: NOISE, start })
  try {
    execFileSync('python3', ['-c', 'import scipy'], { stdio: 'ignore' })
  } catch {
    return null
  }
  return JSON.parse(execFileSync('python3', ['-c', SCIPY], { input, encoding: 'utf8' }))
}

const general = (spectrum, origin) => {
  const x = Array.from(spectrum.wavenumberPerCm)
  const y = Array.from(spectrum.absorbance)
  const model = (p) => (v) => {
    let sum = p[9] + p[10] * (v / origin) ** 4
    for (let k = 0; k < 3; k++)
      sum += p[3 * k + 2] * Math.exp(-FOUR_LN2 * ((v - 1e4 * p[3 * k]) / (1e4 * p[3 * k + 1])) ** 2)
    return sum
  }
  const initialValues = [0, 1, 2].flatMap((k) => [STARTS[2 * k] / 1e4, STARTS[2 * k + 1] / 1e4, 0.5]).concat([0, 0.01])
  const options = { initialValues, damping: 1e-3, maxIterations: 100, errorTolerance: 1e-12, gradientDifference: 1e-6 }
  const chi2 = (p) => x.reduce((sum, v, i) => sum + ((y[i] - model(p)(v)) / NOISE) ** 2, 0)
  const call = () => levenbergMarquardt({ x, y }, model, options)
  return { ms: time(call, 1, 5), chi2: chi2(call().parameterValues) }
}

/** A daemon that has run for a minute: everything compiled. */
const WARM = 500

/** Prints times and ratios. */
export const run = async () => {
  const spectrum = simulate(601)
  const recipe = recipeFor(spectrum.wavenumberPerCm)
  const points = { x: spectrum.wavenumberPerCm, y: spectrum.absorbance, weight: spectrum.noise.map((s) => 1 / s) }
  const origin = (recipe.windowPerCm[0] + recipe.windowPerCm[1]) / 2
  console.log('bands: 601 points, three Gaussians + constant + scatter, cold start')
  const solution = solveRecipe(recipe, points)
  const own = time(() => solveRecipe(recipe, points), 40)
  say('separable fit', own, `chi2 ${solution.chi2.toFixed(6)}, ${solution.iterations} iterations`)
  say(
    'one evaluation of it',
    time(() => separable(recipe, points)(solution.parameters), 100),
  )
  say(
    'fitBands (fit, covariance, curve maxima)',
    time(() => fitBands(spectrum, recipe, []), 40),
  )
  const other = general(spectrum, origin)
  say('ml-levenberg-marquardt', other.ms, `chi2 ${other.chi2.toFixed(6)}: ${(other.ms / own).toFixed(0)} times as long`)
  const python = scipy(spectrum, origin)
  if (python)
    say(
      'SciPy curve_fit, analytic Jacobian',
      python.ms,
      `chi2 ${python.chi2.toFixed(6)}: ${(python.ms / own).toFixed(1)} times as long`,
    )
  else console.log('  SciPy: skipped, python3 has no scipy')
  for (const count of [601, 3501]) {
    const whole = simulate(count)
    const raw = rawOf(whole)
    const call = () => analyse(raw, CONTEXT, null)
    const { analysis } = call()
    const locked = analysis.locked
    say(
      `noise, recipe, fit, ligand field, ${count} points`,
      time(call, 10, 15, WARM),
      `${analysis.fit.recipe.name}, Δ ${analysis.ligandField.deltaPerCm.toFixed(1)}`,
    )
    say(
      `the same under a locked recipe, ${count} points`,
      time(() => analyse(raw, CONTEXT, locked), 10, 15, WARM),
    )
  }
}
