/** The few functions of jstat that the project and its tests call; the package carries no types of its own. */
declare module 'jstat' {
  const jStat: {
    gammaln(x: number): number
    normal: {
      cdf(x: number, mean: number, sd: number): number
      inv(p: number, mean: number, sd: number): number
    }
    studentt: { cdf(x: number, df: number): number; inv(p: number, df: number): number }
    chisquare: { cdf(x: number, df: number): number; inv(p: number, df: number): number }
  }
  export default jStat
}
