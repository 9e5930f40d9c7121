/** The part of jstat (statistical distributions) that is used here; the package brings no types. */
declare module 'jstat' {
  interface Jstat {
    readonly normal: {
      inv(p: number, mean: number, sd: number): number
      cdf(x: number, mean: number, sd: number): number
    }
    readonly studentt: { inv(p: number, freedom: number): number; cdf(t: number, freedom: number): number }
    readonly chisquare: { inv(p: number, freedom: number): number }
  }
  const jstat: Jstat
  export default jstat
}
