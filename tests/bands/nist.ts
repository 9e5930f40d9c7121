/** Reads a data set of NIST StRD nonlinear regression and states its model with the derivatives of it. */
import { readFileSync } from 'node:fs'

export interface ReferenceSet {
  readonly x: readonly number[]
  readonly y: readonly number[]
  readonly starts: readonly [readonly number[], readonly number[]]
  readonly certified: readonly number[]
  readonly deviations: readonly number[]
  readonly sumOfSquares: number
}

export const readReferenceSet = (name: string): ReferenceSet => {
  const text = readFileSync(new URL(`../../fixtures/nist/${name}.dat`, import.meta.url), 'utf8')
  const lines = text.split(/\r?\n/)
  const rows = lines.flatMap((line) => {
    const match = /^\s*b\d+ =\s+(.*)$/.exec(line)
    return match ? [match[1]!.trim().split(/\s+/).map(Number)] : []
  })
  const dataFrom = lines.findLastIndex((line) => /^Data:\s+y/.test(line)) + 1
  const data = lines.slice(dataFrom).flatMap((line) => {
    const parts = line.trim().split(/\s+/).map(Number)
    return parts.length === 2 ? [parts] : []
  })
  return {
    x: data.map((row) => row[1]!),
    y: data.map((row) => row[0]!),
    starts: [rows.map((row) => row[0]!), rows.map((row) => row[1]!)],
    certified: rows.map((row) => row[2]!),
    deviations: rows.map((row) => row[3]!),
    sumOfSquares: Number(/Residual Sum of Squares:\s+(\S+)/.exec(text)![1]),
  }
}

/** Value and gradient of a model at x. */
export type Model = (b: Float64Array, x: number) => readonly [value: number, gradient: readonly number[]]

const exponentials: Model = (b, x) => {
  let value = 0
  const gradient: number[] = []
  for (let i = 0; i < b.length; i += 2) {
    const e = Math.exp(-b[i + 1]! * x)
    value += b[i]! * e
    gradient.push(e, -b[i]! * x * e)
  }
  return [value, gradient]
}

const gauss: Model = (b, x) => {
  const peak = (h: number, c: number, w: number) => {
    const u = (x - c) / w
    const e = Math.exp(-u * u)
    return [e, (h * e * 2 * u) / w, (h * e * 2 * u * u) / w]
  }
  const decay = Math.exp(-b[1]! * x)
  const one = peak(b[2]!, b[3]!, b[4]!)
  const two = peak(b[5]!, b[6]!, b[7]!)
  return [b[0]! * decay + b[2]! * one[0]! + b[5]! * two[0]!, [decay, -b[0]! * x * decay, ...one, ...two]]
}

const eckerle: Model = (b, x) => {
  const u = (x - b[2]!) / b[1]!
  const e = Math.exp(-0.5 * u * u)
  const value = (b[0]! / b[1]!) * e
  return [value, [e / b[1]!, (value * (u * u - 1)) / b[1]!, (value * u) / b[1]!]]
}

const mgh17: Model = (b, x) => {
  const e4 = Math.exp(-x * b[3]!)
  const e5 = Math.exp(-x * b[4]!)
  return [b[0]! + b[1]! * e4 + b[2]! * e5, [1, e4, e5, -b[1]! * x * e4, -b[2]! * x * e5]]
}

const cubicOverCubic: Model = (b, x) => {
  const above = b[0]! + x * (b[1]! + x * (b[2]! + x * b[3]!))
  const below = 1 + x * (b[4]! + x * (b[5]! + x * b[6]!))
  const slope = -above / (below * below)
  return [
    above / below,
    [1 / below, x / below, x ** 2 / below, x ** 3 / below, slope * x, slope * x ** 2, slope * x ** 3],
  ]
}

export const MODELS: Readonly<Record<string, Model>> = {
  Gauss1: gauss,
  Gauss2: gauss,
  Gauss3: gauss,
  Eckerle4: eckerle,
  Lanczos3: exponentials,
  MGH17: mgh17,
  Hahn1: cubicOverCubic,
  Thurber: cubicOverCubic,
}
