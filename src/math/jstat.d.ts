/** The few functions of jstat that the project calls; the package carries no types of its own. */
declare module 'jstat' {
  const jStat: {
    gammaln(x: number): number
    normal: {
      cdf(x: number, mean: number, sd: number): number
      inv(p: number, mean: number, sd: number): number
    }
    studentt: { cdf(x: number, df: number): number; inv(p: number, df: number): number }
    chisquare: { cdf(x: number, df: number): number; inv(p: number, df: number): number }
    centralF: { cdf(x: number, df1: number, df2: number): number; inv(p: number, df1: number, df2: number): number }
    beta: { cdf(x: number, a: number, b: number): number }
    lowRegGamma(a: number, x: number): number
    ibeta(x: number, a: number, b: number): number
  }
  export default jStat
}
