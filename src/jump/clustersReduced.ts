/**
 * Bias-reduced clustered variance (CR2) of a linear estimate, with Satterthwaite degrees of freedom.
 * Source: Bell & McCaffrey 2002, Survey Methodology; Pustejovsky & Tipton 2018, JBES; METHODS section 4, `few-clusters`,
 * identity working covariance.
 * The estimate Σ l_i y_i comes from one regression with terms X and weights W = diag(k); H = X(X'WX)⁻¹X'W. With
 * u_g = B_g^(−1/2) l_g and B_g = [(I−H)(I−H)']_gg, the influence of cluster g is ψ_g = u_g'e_g, and V = Σ ψ_g². B_g is only
 * ever multiplied with vectors, in time that goes with the units of the cluster, so its root costs little however large
 * the cluster is. ν = (Σ_g p_g'p_g)²/Σ_gh (p_g'p_h)² with p_g = (I−H)'u_g, u_g taken as 0 outside its cluster.
 * The levels of thousands of lines may be terms too, but are never stored: X = [R, D], R the rows freed of their weighted
 * means by line, D one dummy per line, H = R M R'W + D Δ⁻¹D'W, M = (R'WR)⁻¹, Δ_c = Σ k over line c.
 */
import { choleskyInPlace, choleskyInverse, inverseRootTimes } from '../math/index.js'
import {
  type ClusterSums,
  eachMeeting,
  type LineTerms,
  lineShares,
  lineTermsOf,
  pairsOverLines,
  takeOffLines,
} from './clustersLines.js'
import type { Influence } from './influence.js'

/** Arrays over the n units of positive weight. */
export interface ClusteredRegression {
  /** Number of terms, levels of lines not counted. */
  readonly columns: number
  /** n × columns, row-major; freed of their weighted means by line where levels of lines are terms. */
  readonly rows: Float64Array
  readonly k: Float64Array
  readonly l: Float64Array
  readonly residual: Float64Array
  readonly cluster: Int32Array
  /** Line codes where levels of lines are terms, else null. */
  readonly line: Int32Array | null
}

export interface BiasReduced {
  /** By cluster, ascending. */
  readonly influence: Influence
  readonly degreesOfFreedom: number
  readonly clusters: number
}

/** What all clusters share. */
interface Shared {
  readonly columns: number
  /** M */
  readonly inverse: Float64Array
  /** MQM, Q = R'W²R. */
  readonly spread: Float64Array
  readonly lines: LineTerms | null
}

/** The units of one cluster. */
interface Members {
  readonly rows: Float64Array
  readonly k: Float64Array
  /** Place of each unit's line among `lines`. */
  readonly place: Int32Array | null
  readonly lines: Int32Array
}

/** Eigenvalues of B up to this are rounding: a direction that the cluster alone decides. */
const smallestEigenvalue = 1e-12

/** Pairs of clusters with a line in common that the degrees of freedom may take: some seconds. */
const mostPairs = 3e8

/** The terms are independent. A string is the reason why there is none: too many pairs of clusters share a line. */
export function reducedClusters(regression: ClusteredRegression): BiasReduced | string {
  const shared = sharedOf(regression)
  const { key, order, start } = byCluster(regression.cluster)
  const psi = new Float64Array(key.length)
  const squares = new Float64Array(key.length)
  const sums: ClusterSums[] = []
  for (let g = 0; g < key.length; g++) {
    const units = order.subarray(start[g], start[g + 1])
    const own = membersOf(regression, units)
    const l = Float64Array.from(units, (unit) => regression.l[unit])
    const u = inverseRootTimes((v, out) => multiply(own, shared, v, out), l, smallestEigenvalue)
    for (let i = 0; i < u.length; i++) {
      psi[g] += u[i] * regression.residual[units[i]]
      squares[g] += u[i] * u[i]
    }
    sums.push(sumsOf(own, shared, u))
  }
  if (shared.lines !== null && pairsOverLines(sums) > mostPairs) {
    return `${key.length} clusters near the lines are too many for few-clusters; write variance: clusters`
  }
  return { influence: { key, psi }, degreesOfFreedom: freedomOf(sums, squares, shared), clusters: key.length }
}

function sharedOf({ columns, rows, k, line }: ClusteredRegression): Shared {
  const moments = new Float64Array(columns * columns)
  const squared = new Float64Array(columns * columns)
  for (let i = 0, at = 0; i < k.length; i++, at += columns) {
    for (let a = 0; a < columns; a++) {
      if (rows[at + a] === 0) continue
      const once = k[i] * rows[at + a]
      const twice = k[i] * once
      for (let b = 0; b <= a; b++) {
        moments[a * columns + b] += once * rows[at + b]
        squared[a * columns + b] += twice * rows[at + b]
      }
    }
  }
  for (let a = 0; a < columns; a++) for (let b = 0; b < a; b++) squared[b * columns + a] = squared[a * columns + b]
  if (!(choleskyInPlace(moments, columns) > 0)) throw new Error('the terms of a clustered regression are dependent')
  const inverse = choleskyInverse(moments, columns)
  const spread = product(inverse, product(squared, inverse, columns), columns)
  return { columns, inverse, spread, lines: line && lineTermsOf(columns, rows, k, line) }
}

/** Cluster codes ascending, and the units of each: order[start[g]] … order[start[g+1]−1]. */
function byCluster(cluster: Int32Array): { key: Int32Array; order: Int32Array; start: Int32Array } {
  const sizes = new Map<number, number>()
  for (const code of cluster) sizes.set(code, (sizes.get(code) ?? 0) + 1)
  const key = Int32Array.from(sizes.keys()).sort()
  const start = new Int32Array(key.length + 1)
  const next = new Map<number, number>()
  key.forEach((code, g) => {
    next.set(code, start[g])
    start[g + 1] = start[g] + (sizes.get(code) as number)
  })
  const order = new Int32Array(cluster.length)
  for (let i = 0; i < cluster.length; i++) {
    const at = next.get(cluster[i]) as number
    order[at] = i
    next.set(cluster[i], at + 1)
  }
  return { key, order, start }
}

function membersOf({ columns, rows, k, line }: ClusteredRegression, units: Int32Array): Members {
  const own = new Float64Array(units.length * columns)
  const places = new Map<number, number>()
  const place = line && new Int32Array(units.length)
  for (let i = 0; i < units.length; i++) {
    own.set(rows.subarray(units[i] * columns, (units[i] + 1) * columns), i * columns)
    if (line === null || place === null) continue
    const code = line[units[i]]
    if (!places.has(code)) places.set(code, places.size)
    place[i] = places.get(code) as number
  }
  return { rows: own, k: Float64Array.from(units, (unit) => k[unit]), place, lines: Int32Array.from(places.keys()) }
}

function sumsOf({ rows, k, place, lines }: Members, shared: Shared, u: Float64Array): ClusterSums {
  const { columns } = shared
  const v = new Float64Array(2 * columns)
  const plain = new Float64Array(lines.length)
  const weighted = new Float64Array(lines.length)
  for (let i = 0, at = 0; i < u.length; i++, at += columns) {
    const ku = k[i] * u[i]
    for (let a = 0; a < columns; a++) {
      v[a] += rows[at + a] * u[i]
      v[columns + a] += rows[at + a] * ku
    }
    if (place === null) continue
    plain[place[i]] += u[i]
    weighted[place[i]] += ku
  }
  const sums = { v, lines, plain, weighted }
  if (shared.lines) takeOffLines(sums, shared.lines)
  return sums
}

/** B v = v − Hv − H'v + HH'v within the cluster. */
function multiply(own: Members, shared: Shared, vector: Float64Array, out: Float64Array): void {
  const { columns } = shared
  const { rows, k, place } = own
  const sums = sumsOf(own, shared, vector)
  const folded = fold(sums.v, shared)
  const crossed = folded.subarray(columns).map((value) => -value)
  const shares = shared.lines && lineShares(sums, shared.lines, crossed)
  for (let i = 0, at = 0; i < vector.length; i++, at += columns) {
    let value = vector[i]
    for (let a = 0; a < columns; a++) value += rows[at + a] * (folded[a] - k[i] * crossed[a])
    if (shares && place) value += shares.added[place[i]] - k[i] * shares.taken[place[i]]
    out[i] = value
  }
}

/** S v, S = [MQM, −M; −M, 0]. */
function fold(v: Float64Array, { columns, inverse, spread }: Shared): Float64Array {
  const folded = new Float64Array(2 * columns)
  for (let a = 0; a < columns; a++) {
    for (let b = 0; b < columns; b++) {
      folded[a] += spread[a * columns + b] * v[b] - inverse[a * columns + b] * v[columns + b]
      folded[columns + a] -= inverse[a * columns + b] * v[b]
    }
  }
  return folded
}

/**
 * ν. p_g'p_h = [g = h] u_g'u_g + x_gh + y_gh with x_gh = v_g'S v_h, and y_gh where both clusters have units of one line. The
 * squares of the first two add up to Σ_g u_g'u_g (u_g'u_g + 2 x_gg) + tr(STST), T = Σ_g v_g v_g': pairs of clusters are
 * needed only where they share a line.
 */
function freedomOf(sums: readonly ClusterSums[], squares: Float64Array, shared: Shared): number {
  const width = 2 * shared.columns
  const folded = sums.map(({ v }) => fold(v, shared))
  const ofAll = new Float64Array(width * width)
  let trace = 0
  let total = 0
  sums.forEach(({ v }, g) => {
    const own = dot(v, folded[g])
    trace += squares[g] + own
    total += squares[g] * (squares[g] + 2 * own)
    for (let a = 0; a < width; a++) for (let b = 0; b < width; b++) ofAll[a * width + b] += folded[g][a] * v[b]
  })
  for (let a = 0; a < width; a++) for (let b = 0; b < width; b++) total += ofAll[a * width + b] * ofAll[b * width + a]
  if (shared.lines) {
    eachMeeting(sums, shared.lines, (g, h, y) => {
      const known = dot(sums[g].v, folded[h]) + (g === h ? squares[g] : 0)
      if (g === h) trace += y
      total += (2 * known + y) * y
    })
  }
  return (trace * trace) / total
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i]
  return sum
}

function product(a: Float64Array, b: Float64Array, size: number): Float64Array {
  const out = new Float64Array(size * size)
  for (let i = 0; i < size; i++) {
    for (let k = 0; k < size; k++) for (let j = 0; j < size; j++) out[i * size + j] += a[i * size + k] * b[k * size + j]
  }
  return out
}
