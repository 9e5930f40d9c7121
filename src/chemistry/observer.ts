/**
 * What an eye sees: the CIE 1931 2° standard observer under the illuminant D65.
 *
 * The colour-matching functions are the multi-lobe fit of Wyman, Sloan and Shirley, "Simple Analytic Approximations to
 * the CIE XYZ Color Matching Functions", J. Computer Graphics Techniques 2 (2013) 1: sums of Gaussians with another
 * width on each side, within about 1 % of the tables. D65 is the table of CIE 15 (10 nm, from memory), interpolated
 * linearly as the CIE prescribes; the white point of both together is checked by a test.
 */

/** Height, centre in nm, and 1/σ in 1/nm below and above the centre. */
type Lobe = readonly [height: number, centreNm: number, below: number, above: number]

const X: readonly Lobe[] = [
  [1.056, 599.8, 0.0264, 0.0323],
  [0.362, 442.0, 0.0624, 0.0374],
  [-0.065, 501.1, 0.049, 0.0382],
]
const Y: readonly Lobe[] = [
  [0.821, 568.8, 0.0213, 0.0247],
  [0.286, 530.9, 0.0613, 0.0322],
]
const Z: readonly Lobe[] = [
  [1.217, 437.0, 0.0845, 0.0278],
  [0.681, 459.0, 0.0385, 0.0725],
]

const sumOf = (lobes: readonly Lobe[], nm: number): number =>
  lobes.reduce((sum, [height, centre, below, above]) => {
    const t = (nm - centre) * (nm < centre ? below : above)
    return sum + height * Math.exp(-0.5 * t * t)
  }, 0)

const D65_FIRST_NM = 380
const D65 = [
  49.9755, 54.6482, 82.7549, 91.486, 93.4318, 86.6823, 104.865, 117.008, 117.812, 114.861, 115.923, 108.811, 109.354,
  107.802, 104.79, 107.689, 104.405, 104.046, 100, 96.3342, 95.788, 88.6856, 90.0062, 89.5991, 87.6987, 83.2886,
  83.6992, 80.0268, 80.2146, 82.2778, 78.2842, 69.7213, 71.6091, 74.349, 61.604, 69.8856, 75.087, 63.5927, 46.4182,
  66.8054, 63.3828,
]

const d65At = (nm: number): number => {
  const place = (nm - D65_FIRST_NM) / 10
  const below = Math.min(Math.floor(place), D65.length - 2)
  return D65[below]! + (D65[below + 1]! - D65[below]!) * (place - below)
}

export const VISIBLE_NM: readonly [number, number] = [380, 780]
const STEP_NM = 5

export type Xyz = readonly [x: number, y: number, z: number]

/** Tristimulus values of D65 through a filter, Y = 1 for a clear one. `transmittanceAt` is asked every 5 nm, 380–780. */
export const tristimulus = (transmittanceAt: (nm: number) => number): Xyz => {
  let [x, y, z, white] = [0, 0, 0, 0]
  for (let nm = VISIBLE_NM[0]; nm <= VISIBLE_NM[1]; nm += STEP_NM) {
    const light = d65At(nm)
    const through = light * transmittanceAt(nm)
    x += through * sumOf(X, nm)
    y += through * sumOf(Y, nm)
    z += through * sumOf(Z, nm)
    white += light * sumOf(Y, nm)
  }
  return [x / white, y / white, z / white]
}

/** The white that a clear cell shows: the reference for L*a*b*. */
export const WHITE: Xyz = tristimulus(() => 1)
