/** P(B ≥ count) of a binomial, 0 < chance < 1: terms from `count` upwards, or one less those below it. */
export function binomialTail(count: number, trials: number, chance: number): number {
  if (count <= trials * chance) return count <= 0 ? 1 : 1 - binomialTail(trials - count + 1, trials, 1 - chance)
  let log = count * Math.log(chance) + (trials - count) * Math.log1p(-chance)
  for (let i = 1; i <= trials - count; i++) log += Math.log((count + i) / i)
  const odds = chance / (1 - chance)
  let [term, sum] = [1, 1]
  for (let i = count; i < trials && term > sum * 1e-17; i++) {
    term *= ((trials - i) / (i + 1)) * odds
    sum += term
  }
  return Math.min(1, Math.exp(log) * sum)
}
