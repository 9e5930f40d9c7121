/**
 * Levels and parameters, timed against general eigensolvers on the undivided matrix, in one run. The undivided matrix is
 * built block-diagonally with every block as often as it is degenerate in space: same size and eigenvalues as the matrix
 * over all highest-M_S states, and mixed by random rotations so that no solver profits from zeros.
 */
import { execFileSync } from 'node:child_process'
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import { findIon } from '../../dist/chemistry/ions.js'
import { levels, solveParameters } from '../../dist/ligandField/index.js'

const FIELD = { geometry: 'octahedral', deltaPerCm: 17400, bPerCm: 725, cPerCm: 3262.5 }

/** Median of five timings, µs a call. */
const timeOf = (call, repeat) => {
  for (let i = 0; i < repeat; i += 1) call(i)
  const runs = Array.from({ length: 5 }, () => {
    const start = performance.now()
    for (let i = 0; i < repeat; i += 1) call(i)
    return ((performance.now() - start) / repeat) * 1000
  })
  return runs.sort((a, b) => a - b)[2]
}

/** Dense symmetric matrix with the spatial eigenvalues of dⁿ, all spins. */
const undivided = (d) => {
  const values = levels(d, FIELD).flatMap(({ energyPerCm, degeneracy, multiplicity }) =>
    Array(degeneracy / multiplicity).fill(energyPerCm),
  )
  const n = values.length
  const a = Array.from({ length: n }, (_, i) => Array.from({ length: n }, (_, j) => (i === j ? values[i] : 0)))
  for (let i = 0; i < n - 1; i += 1)
    for (let j = i + 1; j < n; j += 1) {
      const [c, s] = [Math.cos(i + 2 * j), Math.sin(i + 2 * j)]
      for (let k = 0; k < n; k += 1) {
        const [x, y] = [a[i][k], a[j][k]]
        a[i][k] = c * x - s * y
        a[j][k] = s * x + c * y
      }
      for (let k = 0; k < n; k += 1) {
        const [x, y] = [a[k][i], a[k][j]]
        a[k][i] = c * x - s * y
        a[k][j] = s * x + c * y
      }
    }
  return a
}

const numpyTime = (matrix) => {
  const program = `
import json, sys, time
import numpy as np
a = np.array(json.load(sys.stdin))
a = (a + a.T) / 2
for _ in range(20): np.linalg.eigvalsh(a)
runs = []
for _ in range(5):
    start = time.perf_counter()
    for _ in range(50): np.linalg.eigvalsh(a)
    runs.append((time.perf_counter() - start) / 50 * 1e6)
print(sorted(runs)[2])`
  try {
    const options = { input: JSON.stringify(matrix), encoding: 'utf8', stdio: ['pipe', 'pipe', 'ignore'] }
    return Number(execFileSync('python3', ['-c', program], options))
  } catch {
    return null // python3-numpy is not here
  }
}

const solveTime = (symbol, roles, spin, repeat) => {
  const { ion } = findIon(symbol)
  const covariance = roles.map((_, i) => roles.map((_, j) => (i === j ? 400 : 0)))
  return timeOf((i) => {
    const bands = roles.map(([role, at]) => ({ role, positionPerCm: at + (i % 7) }))
    solveParameters(ion, 'octahedral', spin, bands, covariance)
  }, repeat)
}

const say = (name, us, target) =>
  console.log(
    `${name.padEnd(48)}${us.toFixed(1).padStart(10)} µs${target === undefined ? '' : `   target ${target} µs`}`,
  )

/** Prints times and ratios. */
export const run = async () => {
  for (const [d, target] of [
    [2, undefined],
    [3, 30],
    [4, undefined],
    [5, 150],
    [8, undefined],
  ]) {
    const own = timeOf((i) => levels(d, { ...FIELD, deltaPerCm: 17400 + (i % 100) }), 1500)
    say(`d${d} labelled levels`, own, target)
    if (target === undefined) continue
    const matrix = undivided(d)
    const whole = new Matrix(matrix)
    const general = timeOf(() => new EigenvalueDecomposition(whole, { assumeSymmetric: true }), 20)
    say(`d${d} undivided ${matrix.length} × ${matrix.length}, ml-matrix`, general)
    console.log(`${''.padEnd(50)}${(general / own).toFixed(1)} times as long`)
    const numpy = numpyTime(matrix)
    if (numpy === null) {
      console.log(`d${d} undivided, numpy: not measured, python3-numpy is not installed`)
      continue
    }
    say(`d${d} undivided, numpy.linalg.eigvalsh`, numpy)
    console.log(`${''.padEnd(50)}${(numpy / own).toFixed(1)} times as long`)
  }
  const two = [
    ['nu1', 17400],
    ['nu2', 24600],
  ]
  say('two-band solve, d3', solveTime('Cr3+', two, null, 2000), 50)
  const cobalt = [
    ['nu1', 21050],
    ['nu2', 29550],
  ]
  say('two-band solve with C/B from the table, d6', solveTime('Co3+', cobalt, 'low', 2000), 50)
  const six = [
    ['nu1', 18870],
    ['nu2', 23120],
    ['nu3', 25100],
    ['nu4', 27980],
    ['nu5', 29750],
    ['nu6', 32960],
  ]
  say('six-band solve with C, d5', solveTime('Mn2+', six, 'high', 200), 10000)
}
