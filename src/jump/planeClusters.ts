/**
 * Bias-reduced clustered variance of the jump at a point, with Satterthwaite degrees of freedom.
 * Source: Bell & McCaffrey 2002, Survey Methodology; Pustejovsky & Tipton 2018, JBES; METHODS section 4, `few-clusters`,
 * identity working covariance. Few clusters lie near one point, so the plain clustered variance is too small there.
 * The two sides are one weighted regression with terms X (a block for each side), weights W = diag(k), M = (X'WX)⁻¹ and
 * H = XMX'W. With u_g = B_g^(−1/2) l_g, B_g = [(I−H)(I−H)']_gg, the influence of cluster g is ψ_g = u_g'e_g.
 * B_g = I + Z S Z' with Z = [X_g, W_g X_g] and S = [MQM, −M; −M, 0], Q = X'W²X, so its root costs n_g times the square of
 * the number of terms, however large the cluster.
 * ν = (Σ_g p_g'p_g)²/Σ_gh (p_g'p_h)², p_g the column (I−H)'u_g: from a_g = X_g'u_g and b_g = X_g'W_g u_g alone.
 */
import { choleskyInverse, symmetricEigen } from '../math/index.js'
import type { Influence } from './influence.js'
import { type PlaneFit, planeRows, termCount } from './planeFit.js'
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
  const sums: Float64Array[][] = []
  const squares = new Float64Array(key.length)
  key.forEach((cluster, g) => {
    const own = parts.map((part, s) => ownRows(part, sides[s].rows, (members.get(cluster) as number[][])[s], size))
    const u = reducedWeights(own, sides, size)
    sums.push(
      own.map((side, s) => {
        // a_g and b_g of this side, one after the other
        const sum = new Float64Array(2 * size)
        side.units.forEach((unit, i) => {
          psi[g] += u[s][i] * parts[s].residual[unit]
          squares[g] += u[s][i] ** 2
          for (let a = 0; a < 2 * size; a++) sum[a] += u[s][i] * side.z[i * 2 * size + a]
        })
        return sum
      }),
    )
  })
  return { influence: { key, psi }, degreesOfFreedom: freedomOf(sums, squares, sides, size), clusters: key.length }
}

/** With kernel weights in units of the largest, which leaves B, u and ν as they are. */
interface SideMatrices {
  /** count × (terms, then the kernel weight). */
  readonly rows: Float64Array
  /** M */
  readonly inverse: Float64Array
  /** MQM */
  readonly spread: Float64Array
}

function sideOf({ side, fit }: ClusterPart, size: number): SideMatrices {
  const rows = planeRows(side, fit)
  let largest = 0
  for (let at = size; at < rows.length; at += size + 1) largest = Math.max(largest, rows[at])
  for (let at = size; at < rows.length; at += size + 1) rows[at] /= largest
  const inverse = choleskyInverse(fit.factor, size).map((value) => value * largest)
  const middle = new Float64Array(size * size)
  for (let i = 0; i < fit.count; i++) {
    const at = i * (size + 1)
    const square = rows[at + size] ** 2
    for (let a = 0; a < size; a++)
      for (let b = 0; b < size; b++) middle[a * size + b] += square * rows[at + a] * rows[at + b]
  }
  return { rows, inverse, spread: product(inverse, product(middle, inverse, size), size) }
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

function ownRows({ weights }: ClusterPart, rows: Float64Array, units: readonly number[], size: number): OwnRows {
  const z = new Float64Array(units.length * 2 * size)
  units.forEach((unit, i) => {
    const k = rows[unit * (size + 1) + size]
    for (let a = 0; a < size; a++) {
      z[i * 2 * size + a] = rows[unit * (size + 1) + a]
      z[i * 2 * size + size + a] = k * rows[unit * (size + 1) + a]
    }
  })
  return { units, z, l: Float64Array.from(units, (unit) => weights[unit]) }
}

/** u = B^(−1/2) l of one cluster. The sides share no term, so B has a block for each side. */
function reducedWeights(own: readonly OwnRows[], sides: readonly SideMatrices[], size: number): Float64Array[] {
  return own.map(({ z, l }, s) => {
    if (l.length === 0) return l
    const width = 2 * size
    const { basis, rank, root } = orthonormal(z, l.length, width)
    // B in the basis: I + root' S root, root = P Γ^(1/2)
    const inner = new Float64Array(rank * rank)
    const folded = foldedRoot(root, rank, sides[s], size)
    for (let a = 0; a < rank; a++) {
      for (let b = 0; b < rank; b++) {
        let value = a === b ? 1 : 0
        for (let c = 0; c < width; c++) value += root[c * rank + a] * folded[c * rank + b]
        inner[a * rank + b] = value
      }
    }
    const { values, vectors } = symmetricEigen(inner, rank)
    const part = new Float64Array(rank)
    for (let i = 0; i < l.length; i++) for (let a = 0; a < rank; a++) part[a] += basis[i * rank + a] * l[i]
    const change = new Float64Array(rank)
    for (let k = 0; k < rank; k++) {
      let along = 0
      for (let a = 0; a < rank; a++) along += vectors[a * rank + k] * part[a]
      const stretch = values[k] > smallestShare ? 1 / Math.sqrt(values[k]) - 1 : -1
      for (let a = 0; a < rank; a++) change[a] += stretch * along * vectors[a * rank + k]
    }
    return l.map((value, i) => {
      let added = 0
      for (let a = 0; a < rank; a++) added += basis[i * rank + a] * change[a]
      return value + added
    })
  })
}

/** Z = basis · root', the basis orthonormal (n × rank), root = P Γ^(1/2) from the eigenvalues Γ of Z'Z. */
function orthonormal(z: Float64Array, n: number, width: number) {
  const gram = new Float64Array(width * width)
  for (let i = 0; i < n; i++) {
    for (let a = 0; a < width; a++)
      for (let b = 0; b <= a; b++) gram[a * width + b] += z[i * width + a] * z[i * width + b]
  }
  const { values, vectors } = symmetricEigen(gram, width)
  const kept: number[] = []
  for (let k = 0; k < width; k++) if (values[k] > smallestShare * values[width - 1]) kept.push(k)
  const rank = kept.length
  const root = new Float64Array(width * rank)
  const basis = new Float64Array(n * rank)
  kept.forEach((k, a) => {
    const length = Math.sqrt(values[k])
    for (let c = 0; c < width; c++) root[c * rank + a] = vectors[c * width + k] * length
    for (let i = 0; i < n; i++) {
      for (let c = 0; c < width; c++) basis[i * rank + a] += (z[i * width + c] * vectors[c * width + k]) / length
    }
  })
  return { basis, rank, root }
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

/** ν; p_g'p_h = [g = h] u_g'u_g − b_g'M a_h − b_h'M a_g + a_g'MQM a_h, summed over the sides. */
function freedomOf(
  sums: readonly Float64Array[][],
  squares: Float64Array,
  sides: readonly SideMatrices[],
  size: number,
): number {
  const folded = sums.map((bySide) => bySide.map((sum, s) => foldedRoot(sum, 1, sides[s], size)))
  let trace = 0
  let total = 0
  for (let g = 0; g < sums.length; g++) {
    for (let h = 0; h <= g; h++) {
      let value = g === h ? squares[g] : 0
      for (let s = 0; s < sides.length; s++) {
        for (let a = 0; a < 2 * size; a++) value += sums[g][s][a] * folded[h][s][a]
      }
      if (g === h) trace += value
      total += g === h ? value * value : 2 * value * value
    }
  }
  return (trace * trace) / total
}

function product(a: Float64Array, b: Float64Array, size: number): Float64Array {
  const out = new Float64Array(size * size)
  for (let i = 0; i < size; i++) {
    for (let k = 0; k < size; k++) for (let j = 0; j < size; j++) out[i * size + j] += a[i * size + k] * b[k * size + j]
  }
  return out
}
