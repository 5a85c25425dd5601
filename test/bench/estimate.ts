/**
 * Estimating one line after reading: sort, neighbours, plug-in bandwidth, jump, at 10⁴ to 10⁷ rows.
 * Seeded; the first size is run twice to warm up. Prints processor seconds of each part, nanoseconds a row and the growth exponent.
 */
import { bandwidthsFor, buildSample, type Entries, jumpAt, neighbourResidualsOf } from '../../src/jump/index.js'
import { seededRandom } from '../../src/math/index.js'

function draw(n: number): Entries {
  const random = seededRandom(n)
  const x = Float64Array.from({ length: n }, () => 2 * random.next() - 1)
  return {
    x,
    treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
    unit: Int32Array.from(x, (_, i) => i),
    y: Float64Array.from(x, (value) => Math.cos(2 * value) + (value >= 0 ? 0.5 : 0) + 0.5 * (random.next() - 0.5)),
  }
}

export interface EstimateTimes {
  readonly sort: number
  readonly neighbours: number
  readonly bandwidth: number
  readonly jump: number
}

export function timeEstimate(entries: Entries): EstimateTimes {
  const marks = [process.cpuUsage().user / 1000]
  const sample = buildSample(entries)
  marks.push(process.cpuUsage().user / 1000)
  const residuals = neighbourResidualsOf(sample)
  marks.push(process.cpuUsage().user / 1000)
  const options = { order: 1, kernel: 'triangular', sides: 'common', clustered: false } as const
  const chosen = bandwidthsFor(sample, { kind: 'rule', rule: 'mse' }, options, residuals)
  if (!chosen.ok) throw new Error(chosen.reason)
  marks.push(process.cpuUsage().user / 1000)
  const estimated = jumpAt(
    sample,
    chosen.bandwidths,
    { ...options, variance: 'neighbours', reference: 't', level: 0.95 },
    residuals,
  )
  if (!estimated.ok) throw new Error(estimated.reason)
  marks.push(process.cpuUsage().user / 1000)
  const [sort, neighbours, bandwidth, jump] = marks.slice(1).map((mark, i) => (mark - marks[i]) / 1000)
  return { sort, neighbours, bandwidth, jump }
}

export function benchEstimate(sizes: readonly number[] = [1e4, 1e5, 1e6, 1e7]): void {
  for (let warm = 0; warm < 3; warm++) timeEstimate(draw(sizes[0]))
  console.log('estimate: processor seconds for sort, neighbours, bandwidth, jump; one thread')
  console.log('rows        sort  neighb  bandw    jump   total   ns/row  exponent')
  let before: { n: number; total: number } | undefined
  for (const n of sizes) {
    const { sort, neighbours, bandwidth, jump } = timeEstimate(draw(n))
    const total = sort + neighbours + bandwidth + jump
    const exponent = before ? Math.log(total / before.total) / Math.log(n / before.n) : Number.NaN
    const seconds = [sort, neighbours, bandwidth, jump, total].map((value) => value.toFixed(3).padStart(7)).join(' ')
    const growth = before ? exponent.toFixed(2) : ''
    console.log(`${String(n).padEnd(9)} ${seconds} ${((total / n) * 1e9).toFixed(0).padStart(8)} ${growth.padStart(8)}`)
    before = { n, total }
  }
}
