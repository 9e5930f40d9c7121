/** Each step keeps this share of the stretch. */
const KEPT = (Math.sqrt(5) - 1) / 2

/** Where a function of one variable with one minimum between `lower` and `upper` is least, by golden sections (Kiefer 1953). */
export const goldenMinimum = (f: (x: number) => number, lower: number, upper: number, steps: number): number => {
  let [low, high] = [lower, upper]
  let [left, right] = [high - KEPT * (high - low), low + KEPT * (high - low)]
  let [atLeft, atRight] = [f(left), f(right)]
  for (let step = 0; step < steps; step++) {
    if (atLeft <= atRight) {
      high = right
      ;[right, atRight] = [left, atLeft]
      left = high - KEPT * (high - low)
      atLeft = f(left)
    } else {
      low = left
      ;[left, atLeft] = [right, atRight]
      right = low + KEPT * (high - low)
      atRight = f(right)
    }
  }
  return atLeft <= atRight ? left : right
}
