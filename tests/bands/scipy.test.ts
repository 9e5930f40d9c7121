/** SciPy (a general-purpose library) on the same simulated spectra: its curve_fit must come to the same minimum. */
import { execFileSync } from 'node:child_process'
import { describe, expect, it } from 'vitest'
import { solveRecipe } from '../../src/bands/solveRecipe.ts'
import type { Recipe } from '../../src/bands/types.ts'
import { gaussianNoise, generator, simulate } from './simulated.ts'

const pythonWithScipy = (): string | null =>
  ['python3', '/usr/bin/python3'].find((python) => {
    try {
      execFileSync(python, ['-c', 'import scipy.optimize'], { stdio: 'ignore' })
      return true
    } catch {
      return false
    }
  }) ?? null

const PROGRAM = `
import json, sys, numpy as np
from scipy.optimize import curve_fit
L = 4*np.log(2)
for line in sys.stdin:
    d = json.loads(line); x = np.array(d['x']); y = np.array(d['y']); x0 = d['x0']
    def f(x, *p):
        return sum(p[3*k+2]*np.exp(-L*((x-p[3*k])/p[3*k+1])**2) for k in range(2)) + p[6] + p[7]*(x/x0)**4
    def jac(x, *p):
        cols = []
        for k in range(2):
            u = (x-p[3*k])/p[3*k+1]; g = np.exp(-L*u*u); h, w = p[3*k+2], p[3*k+1]
            cols += [h*g*2*L*u/w, h*g*2*L*u*u/w, g]
        return np.stack(cols + [np.ones_like(x), (x/x0)**4], axis=1)
    s = np.full_like(x, d['noise'])
    p, _ = curve_fit(f, x, y, d['start'], jac=jac, sigma=s, ftol=1e-14, xtol=1e-14, gtol=1e-14, maxfev=10000)
    print(json.dumps({'chi2': float((((y-f(x, *p))/s)**2).sum()), 'positions': [p[0], p[3]]}))
`

const NOISE = 0.001
const python = pythonWithScipy()
const title = python === null ? ' (skipped: no python3 here has scipy)' : ''

describe.skipIf(python === null)(`the same minimum as SciPy's curve_fit${title}`, () => {
  it('on twenty spectra: χ² to 1e-8, positions to 0.01 cm⁻¹', () => {
    const random = generator(31)
    const normal = gaussianNoise(random)
    const between = (a: number, b: number) => a + (b - a) * random()
    const cases = Array.from({ length: 20 }, () => {
      const bands = [17400, 24600].map((p) => [p + between(-800, 800), between(3000, 4500), between(0.3, 0.8)] as const)
      const spectrum = simulate({ bands, constant: 0.01, scatter: 0.03 }, NOISE, normal)
      const { wavenumberPerCm: x, absorbance: y } = spectrum
      const recipe: Recipe = {
        name: '2 gaussian + constant + scatter',
        components: bands.map(([p]) => ({
          shape: { kind: 'gaussian' },
          kind: 'band',
          positionPerCm: p + 300,
          positionBoundsPerCm: [p - 2500, p + 2500],
          widthPerCm: 3500,
          widthBoundsPerCm: [1200, 7000],
        })),
        background: [{ kind: 'constant' }, { kind: 'scatter', exponent: 4 }],
        windowPerCm: [x[0]!, x.at(-1)!],
      }
      const own = solveRecipe(recipe, { x, y, weight: x.map(() => 1 / NOISE) })!
      const x0 = (x[0]! + x.at(-1)!) / 2
      const start = bands.flatMap(([p]) => [p + 300, 3500, 0.5]).concat([0, 0.02])
      return { own, input: JSON.stringify({ x: [...x], y: [...y], x0, noise: NOISE, start }) }
    })
    const answer = execFileSync(python!, ['-c', PROGRAM], {
      input: cases.map(({ input }) => input).join('\n'),
      encoding: 'utf8',
    })
    const theirs = answer
      .trim()
      .split('\n')
      .map((line) => JSON.parse(line) as { chi2: number; positions: readonly [number, number] })
    cases.forEach(({ own }, i) => {
      const { chi2, positions } = theirs[i]!
      expect(Math.abs(own.chi2 - chi2) / chi2).toBeLessThan(1e-8)
      expect(Math.abs(own.parameters[0]! - positions[0])).toBeLessThan(0.01)
      expect(Math.abs(own.parameters[2]! - positions[1])).toBeLessThan(0.01)
    })
  }, 60_000)
})
