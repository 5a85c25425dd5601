import jStat from 'jstat'

/**
 * P(B ≥ count) of a binomial, 0 < chance < 1: terms from `count` upwards, or one less those below it. The first term comes from
 * jstat's log-gamma, whose error of 1e-10 is that of the answer; a sum of jstat's own terms would lose the tails.
 */
export function binomialTail(count: number, trials: number, chance: number): number {
  if (count <= trials * chance) return count <= 0 ? 1 : 1 - binomialTail(trials - count + 1, trials, 1 - chance)
  const ways = jStat.gammaln(trials + 1) - jStat.gammaln(count + 1) - jStat.gammaln(trials - count + 1)
  const log = ways + count * Math.log(chance) + (trials - count) * Math.log1p(-chance)
  const odds = chance / (1 - chance)
  let [term, sum] = [1, 1]
  for (let i = count; i < trials && term > sum * 1e-17; i++) {
    term *= ((trials - i) / (i + 1)) * odds
    sum += term
  }
  return Math.min(1, Math.exp(log) * sum)
}
