/**
 * Bias-reduced clustered variance of the jump at a point, with Satterthwaite degrees of freedom.
 * Source: Bell & McCaffrey 2002, Survey Methodology; Pustejovsky & Tipton 2018, JBES; METHODS section 4, `few-clusters`,
 * identity working covariance. Few clusters lie near one point, so the plain clustered variance is too small there.
 * The two sides are one weighted regression with terms X (a block for each side), weights W = diag(k), M = (X'WX)⁻¹ and
 * H = XMX'W. With u_g = B_g^(−1/2) l_g, B_g = [(I−H)(I−H)']_gg, the influence of cluster g is ψ_g = u_g'e_g.
 * B_g = I + Z S Z' with Z = [X_g, W_g X_g] and S = [MQM, −M; −M, 0], Q = X'W²X, so its root costs n_g times the square of
 * the number of terms, however large the cluster.
 * ν = (Σ_g p_g'p_g)²/Σ_gh (p_g'p_h)², p_g the column (I−H)'u_g, with
 * p_g'p_h = [g = h] u_g'u_g − b_g'M a_h − a_g'M b_h + a_g'MQM a_h from a_g = X_g'u_g and b_g = X_g'W_g u_g alone.
 */
import { choleskyInverse, symmetricEigen } from '../math/index.js'
import type { Influence } from './influence.js'
import { type PlaneFit, termCount } from './planeFit.js'
import type { PlaneSide } from './planeSample.js'

/** One side: its fit, and by unit of positive weight l (signed) and the residual. */
export interface ClusterPart {
  readonly side: PlaneSide
  readonly fit: PlaneFit
  readonly weights: Float64Array
  readonly residual: Float64Array
}

export interface BiasReduced {
  /** By cluster. */
  readonly influence: Influence
  readonly degreesOfFreedom: number
  readonly clusters: number
}

/** Directions of Z shorter than this share of the longest are rounding; so are eigenvalues of B below it. */
const smallestShare = 1e-11

/** The jump of two sides fitted at one order; every unit of the fits has a cluster code. */
export function biasReducedClusters(parts: readonly ClusterPart[]): BiasReduced {
  const size = termCount(parts[0].fit.order)
  const sides = parts.map((part) => sideOf(part, size))
  const members = clustersOf(parts)
  const key = Int32Array.from(members.keys()).sort()
  const psi = new Float64Array(key.length)
  const width = 2 * size
  const sums: Float64Array[] = []
  const squares = new Float64Array(key.length)
  key.forEach((cluster, g) => {
    const own = parts.map((part, s) => ownRows(part, sides[s], (members.get(cluster) as number[][])[s], size))
    const u = reducedWeights(own, sides, size)
    const sum = new Float64Array(parts.length * width)
    own.forEach(({ units, z }, s) => {
      for (let i = 0; i < units.length; i++) {
        psi[g] += u[s][i] * parts[s].residual[units[i]]
        squares[g] += u[s][i] ** 2
        for (let a = 0; a < width; a++) sum[s * width + a] += u[s][i] * z[i * width + a]
      }
    })
    sums.push(sum)
  })
  return { influence: { key, psi }, degreesOfFreedom: freedomOf(sums, squares, sides, size), clusters: key.length }
}

/** With kernel weights in units of the largest, which leaves B, u and ν as they are. */
interface SideMatrices {
  /** Kernel weights. */
  readonly k: Float64Array
  /** M */
  readonly inverse: Float64Array
  /** MQM */
  readonly spread: Float64Array
}

function sideOf({ fit }: ClusterPart, size: number): SideMatrices {
  let largest = 0
  for (let i = 0; i < fit.count; i++) largest = Math.max(largest, fit.k[i])
  const k = fit.k.map((value) => value / largest)
  const inverse = choleskyInverse(fit.factor, size).map((value) => value * largest)
  const middle = new Float64Array(size * size)
  for (let i = 0, at = 0; i < fit.count; i++, at += size) {
    for (let a = 0; a < size; a++) {
      const weighted = k[i] * k[i] * fit.rows[at + a]
      for (let b = 0; b < size; b++) middle[a * size + b] += weighted * fit.rows[at + b]
    }
  }
  return { k, inverse, spread: product(inverse, product(middle, inverse, size), size) }
}

/** Units of each cluster, by side. */
function clustersOf(parts: readonly ClusterPart[]): Map<number, number[][]> {
  const members = new Map<number, number[][]>()
  parts.forEach(({ side, fit }, s) => {
    if (side.cluster === null) throw new Error('the clustered variance needs cluster codes')
    for (let i = 0; i < fit.count; i++) {
      const known = members.get(side.cluster[i])
      if (known) known[s].push(i)
      else
        members.set(
          side.cluster[i],
          parts.map((_, other) => (other === s ? [i] : [])),
        )
    }
  })
  return members
}

/** One side's units of a cluster: their rows of Z, and their l. */
interface OwnRows {
  readonly units: readonly number[]
  readonly z: Float64Array
  readonly l: Float64Array
}

function ownRows({ fit, weights }: ClusterPart, { k }: SideMatrices, units: readonly number[], size: number): OwnRows {
  const z = new Float64Array(units.length * 2 * size)
  const l = new Float64Array(units.length)
  for (let i = 0; i < units.length; i++) {
    const unit = units[i]
    l[i] = weights[unit]
    for (let a = 0; a < size; a++) {
      const term = fit.rows[unit * size + a]
      z[i * 2 * size + a] = term
      z[i * 2 * size + size + a] = k[unit] * term
    }
  }
  return { units, z, l }
}

/** u = B^(−1/2) l of one cluster. The sides share no term, so B has a block for each side. */
function reducedWeights(own: readonly OwnRows[], sides: readonly SideMatrices[], size: number): Float64Array[] {
  return own.map(({ z, l }, s) => {
    if (l.length === 0) return l
    const width = 2 * size
    const gram = new Float64Array(width * width)
    const along = new Float64Array(width)
    for (let i = 0, at = 0; i < l.length; i++, at += width) {
      for (let a = 0; a < width; a++) {
        along[a] += z[at + a] * l[i]
        for (let b = 0; b <= a; b++) gram[a * width + b] += z[at + a] * z[at + b]
      }
    }
    for (let a = 0; a < width; a++) for (let b = 0; b < a; b++) gram[b * width + a] = gram[a * width + b]
    const change = bySeries(gram, along, sides[s], size) ?? byEigenvalues(gram, along, sides[s], size)
    return l.map((value, i) => {
      let added = 0
      for (let a = 0; a < width; a++) added += z[i * width + a] * change[a]
      return value + added
    })
  })
}

const longestSeries = 150

/**
 * c with B^(−1/2) l = l + Z c, by (I + E)^(−1/2) = Σ binom(−1/2, j) E^j, E = Z S Z', so that every term is Z times a short
 * vector: c_j = binom(−1/2, j) (SG)^(j−1) S Z'l, G = Z'Z. Ends at 1e-15 of the first term; undefined where a cluster
 * decides so much of the fit that the series is long.
 */
function bySeries(gram: Float64Array, along: Float64Array, side: SideMatrices, size: number): Float64Array | undefined {
  const width = 2 * size
  let term = foldedRoot(along, 1, side, size)
  const change = new Float64Array(width)
  const image = new Float64Array(width)
  let binomial = 1
  let first = 0
  for (let j = 1; j <= longestSeries; j++) {
    binomial *= (0.5 - j) / j
    let length = 0
    for (let a = 0; a < width; a++) {
      change[a] += binomial * term[a]
      image[a] = 0
      for (let b = 0; b < width; b++) image[a] += gram[a * width + b] * term[b]
      length += term[a] * image[a]
    }
    if (j === 1) first = length
    if (!(length > 1e-30 * first)) return change
    term = foldedRoot(image, 1, side, size)
  }
  return undefined
}

/** The same by the eigenvalues of B in an orthonormal basis of Z; directions of eigenvalue 0 are taken out (pseudo-inverse). */
function byEigenvalues(gram: Float64Array, along: Float64Array, side: SideMatrices, size: number): Float64Array {
  const width = 2 * size
  // Z = basis · root', basis = Z · toBasis orthonormal, from the eigenvalues Γ of Z'Z: root = P Γ^(1/2), toBasis = P Γ^(−1/2)
  const ofGram = symmetricEigen(gram, width)
  const kept: number[] = []
  for (let k = 0; k < width; k++) if (ofGram.values[k] > smallestShare * ofGram.values[width - 1]) kept.push(k)
  const rank = kept.length
  const root = new Float64Array(width * rank)
  const toBasis = new Float64Array(width * rank)
  kept.forEach((k, a) => {
    const length = Math.sqrt(ofGram.values[k])
    for (let c = 0; c < width; c++) {
      root[c * rank + a] = ofGram.vectors[c * width + k] * length
      toBasis[c * rank + a] = ofGram.vectors[c * width + k] / length
    }
  })
  const folded = foldedRoot(root, rank, side, size)
  const inner = new Float64Array(rank * rank)
  const part = new Float64Array(rank)
  for (let a = 0; a < rank; a++) {
    inner[a * rank + a] = 1
    for (let c = 0; c < width; c++) {
      part[a] += toBasis[c * rank + a] * along[c]
      for (let b = 0; b < rank; b++) inner[a * rank + b] += root[c * rank + a] * folded[c * rank + b]
    }
  }
  const { values, vectors } = symmetricEigen(inner, rank)
  const change = new Float64Array(width)
  for (let k = 0; k < rank; k++) {
    let projected = 0
    for (let a = 0; a < rank; a++) projected += vectors[a * rank + k] * part[a]
    const stretch = (values[k] > smallestShare ? 1 / Math.sqrt(values[k]) - 1 : -1) * projected
    for (let a = 0; a < rank; a++) {
      for (let c = 0; c < width; c++) change[c] += stretch * vectors[a * rank + k] * toBasis[c * rank + a]
    }
  }
  return change
}

/** S · root, S = [MQM, −M; −M, 0]. */
function foldedRoot(root: Float64Array, rank: number, { inverse, spread }: SideMatrices, size: number): Float64Array {
  const folded = new Float64Array(2 * size * rank)
  for (let a = 0; a < size; a++) {
    for (let b = 0; b < rank; b++) {
      for (let c = 0; c < size; c++) {
        folded[a * rank + b] +=
          spread[a * size + c] * root[c * rank + b] - inverse[a * size + c] * root[(size + c) * rank + b]
        folded[(size + a) * rank + b] -= inverse[a * size + c] * root[c * rank + b]
      }
    }
  }
  return folded
}

/**
 * ν. p_g'p_h = [g = h] u_g'u_g + x_gh, x_gh = v_g'S v_h with v_g = (a_g, b_g) of the sides one after the other, so the squares
 * add up to Σ_g u_g'u_g (u_g'u_g + 2 x_gg) + tr(STST), T = Σ_g v_g v_g': no pairs of clusters.
 */
function freedomOf(
  sums: readonly Float64Array[],
  squares: Float64Array,
  sides: readonly SideMatrices[],
  size: number,
): number {
  const block = 2 * size
  const width = block * sides.length
  const crossed = new Float64Array(width * width)
  let trace = 0
  let total = 0
  for (let g = 0; g < sums.length; g++) {
    const sum = sums[g]
    let own = 0
    sides.forEach((side, s) => {
      const folded = foldedRoot(sum.subarray(s * block, (s + 1) * block), 1, side, size)
      for (let a = 0; a < block; a++) own += sum[s * block + a] * folded[a]
    })
    trace += squares[g] + own
    total += squares[g] * (squares[g] + 2 * own)
    for (let a = 0; a < width; a++) {
      if (sum[a] === 0) continue
      for (let b = 0; b < width; b++) crossed[a * width + b] += sum[a] * sum[b]
    }
  }
  const folded = new Float64Array(width * width)
  sides.forEach((side, s) => {
    const from = s * block * width
    folded.set(foldedRoot(crossed.subarray(from, from + block * width), width, side, size), from)
  })
  for (let a = 0; a < width; a++) for (let b = 0; b < width; b++) total += folded[a * width + b] * folded[b * width + a]
  return (trace * trace) / total
}

function product(a: Float64Array, b: Float64Array, size: number): Float64Array {
  const out = new Float64Array(size * size)
  for (let i = 0; i < size; i++) {
    for (let k = 0; k < size; k++) for (let j = 0; j < size; j++) out[i * size + j] += a[i * size + k] * b[k * size + j]
  }
  return out
}
