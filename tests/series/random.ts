/** Repeatable random numbers: mulberry32 for the uniform ones, Box and Muller's transform for the normal ones. */
export const seeded = (seed: number) => {
  let state = seed >>> 0
  const uniform = () => {
    state = (state + 0x6d2b79f5) >>> 0
    let t = Math.imul(state ^ (state >>> 15), 1 | state)
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
    return ((t ^ (t >>> 14)) >>> 0) / 4_294_967_296
  }
  let spare: number | null = null
  const normal = (): number => {
    if (spare !== null) {
      const kept = spare
      spare = null
      return kept
    }
    const r = Math.sqrt(-2 * Math.log(1 - uniform()))
    const phi = 2 * Math.PI * uniform()
    spare = r * Math.sin(phi)
    return r * Math.cos(phi)
  }
  return { uniform, normal }
}
