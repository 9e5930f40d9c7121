/**
 * The colour of a solution from its absorbance: T = 10^−A, tristimulus values, then CIE 1976 L*a*b* (CIE 15; ISO/CIE
 * 11664-4) against the white of a clear cell. It is the colour of light sent through the cell once.
 */
import { tristimulus, VISIBLE_NM, WHITE, type Xyz } from './observer.ts'

/** CIE 1976 L*, a*, b*. */
export type Lab = readonly [l: number, a: number, b: number]

export type TransmittedColour =
  | { readonly kind: 'colour'; readonly xyz: Xyz; readonly lab: Lab; readonly words: string }
  | { readonly kind: 'unknown'; readonly why: string }

/** Beyond these the eye's response is below about 1 % of its maximum, so the end value may stand for what is missing. */
const NEEDED_NM: readonly [number, number] = [410, 690]

/**
 * Colour that a cell with this decadic absorbance shows, for the path at which it was measured. `absorbanceAt` gives null
 * outside the measured range; a spectrum that does not reach from 410 to 690 nm has no colour to speak of.
 */
export const transmittedColour = (absorbanceAt: (nm: number) => number | null): TransmittedColour => {
  const known = (nm: number): number | null => {
    const a = absorbanceAt(nm)
    return a === null || Number.isNaN(a) ? null : a
  }
  const values = new Map<number, number>()
  for (let nm = VISIBLE_NM[0]; nm <= VISIBLE_NM[1]; nm += 5) {
    const a = known(nm)
    if (a !== null) values.set(nm, a)
    else if (nm >= NEEDED_NM[0] && nm <= NEEDED_NM[1])
      return { kind: 'unknown', why: `the spectrum has no value at ${nm} nm, and the eye sees there` }
  }
  const [first, last] = [Math.min(...values.keys()), Math.max(...values.keys())]
  const xyz = tristimulus((nm) => 10 ** -values.get(Math.min(last, Math.max(first, nm)))!)
  const lab = labOf(xyz)
  return { kind: 'colour', xyz, lab, words: colourWords(lab) }
}

const EPSILON = 216 / 24_389
const KAPPA = 24_389 / 27

/** L*a*b* against the white of a clear cell. */
export const labOf = (xyz: Xyz): Lab => {
  const f = (i: 0 | 1 | 2) => {
    const t = xyz[i] / WHITE[i]
    return t > EPSILON ? Math.cbrt(t) : (KAPPA * t + 16) / 116
  }
  const [fx, fy, fz] = [f(0), f(1), f(2)]
  return [116 * fy - 16, 500 * (fx - fy), 200 * (fy - fz)]
}

/** Upper end of each hue angle h_ab, degrees. */
const HUES: readonly (readonly [untilDegrees: number, word: string])[] = [
  [10, 'pink-red'],
  [45, 'red'],
  [75, 'orange'],
  [105, 'yellow'],
  [130, 'yellow-green'],
  [175, 'green'],
  [225, 'blue-green'],
  [295, 'blue'],
  [320, 'violet'],
  [350, 'purple'],
  [360, 'pink-red'],
]

/** `pale violet`, `blue-green`, `deep red`, `nearly colourless`: for comparing with what one sees, not a standard's names. */
export const colourWords = ([l, a, b]: Lab): string => {
  const chroma = Math.hypot(a, b)
  if (l < 8) return 'nearly black'
  if (chroma < 3) return l > 90 ? 'nearly colourless' : 'grey'
  const hue = ((Math.atan2(b, a) * 180) / Math.PI + 360) % 360
  const word = HUES.find(([until]) => hue < until)![1]
  if (l > 75 && chroma < 35) return `pale ${word}`
  return l < 40 ? `deep ${word}` : word
}

const RADIANS = Math.PI / 180
const cosine = (degrees: number) => Math.cos(degrees * RADIANS)
const sine = (degrees: number) => Math.sin(degrees * RADIANS)

/**
 * CIEDE2000 colour difference with k_L = k_C = k_H = 1 (ISO/CIE 11664-6), after Sharma, Wu and Dalal, Color Research and
 * Application 30 (2005) 21, whose cases for the mean hue are followed. About 1 is just seen side by side.
 */
export const ciede2000 = ([l1, a1, b1]: Lab, [l2, a2, b2]: Lab): number => {
  const meanC = (Math.hypot(a1, b1) + Math.hypot(a2, b2)) / 2
  const g = 0.5 * (1 - Math.sqrt(meanC ** 7 / (meanC ** 7 + 25 ** 7)))
  const polar = (a: number, b: number): readonly [c: number, h: number] => {
    const stretched = (1 + g) * a
    const angle = stretched === 0 && b === 0 ? 0 : Math.atan2(b, stretched) / RADIANS
    return [Math.hypot(stretched, b), angle < 0 ? angle + 360 : angle]
  }
  const [c1, h1] = polar(a1, b1)
  const [c2, h2] = polar(a2, b2)
  const turn = c1 * c2 === 0 ? 0 : ((h2 - h1 + 540) % 360) - 180
  const deltaL = l2 - l1
  const deltaC = c2 - c1
  const deltaH = 2 * Math.sqrt(c1 * c2) * sine(turn / 2)
  const l = (l1 + l2) / 2
  const c = (c1 + c2) / 2
  const h = meanHue(h1, h2, c1 * c2)
  const t = 1 - 0.17 * cosine(h - 30) + 0.24 * cosine(2 * h) + 0.32 * cosine(3 * h + 6) - 0.2 * cosine(4 * h - 63)
  const sL = 1 + (0.015 * (l - 50) ** 2) / Math.sqrt(20 + (l - 50) ** 2)
  const sC = 1 + 0.045 * c
  const sH = 1 + 0.015 * c * t
  const rotation = -2 * Math.sqrt(c ** 7 / (c ** 7 + 25 ** 7)) * sine(60 * Math.exp(-(((h - 275) / 25) ** 2)))
  const [x, y, z] = [deltaL / sL, deltaC / sC, deltaH / sH]
  return Math.sqrt(x * x + y * y + z * z + rotation * y * z)
}

const meanHue = (h1: number, h2: number, chromas: number): number => {
  const sum = h1 + h2
  if (chromas === 0) return sum
  if (Math.abs(h1 - h2) <= 180) return sum / 2
  return sum < 360 ? (sum + 360) / 2 : (sum - 360) / 2
}
