/**
 * Variances and covariances that allow for noise in common on the ground.
 * Source: Conley 1999, J. Econometrics; METHODS section 4: V = Σ_ij ψ_i ψ_j κ(d_ij/D), κ(u) = max(0, 1 − u), d_ij geodesic.
 * Any two estimates have the covariance Σ_ij ψ_ai ψ_bj κ(d_ij/D). κ of distances in the plane is not positive definite, so
 * a variance may come out negative: then there is none. Where the variances are positive but that of some combination of the
 * estimates is not, covariances are shrunk by the least that mends it.
 */
import { argsortBy } from '../math/index.js'
import { shrinkToDefinite } from './definite.js'
import type { Influence } from './influence.js'
import { eachNeighbourhood, type SpatialPlaces } from './spatialPairs.js'

/** Influence values by place: those of place `visited[i]` stand from start[i] to start[i + 1]. */
interface ByPlace {
  readonly visited: Int32Array
  readonly start: Int32Array
  /** Ascending within a place, each estimate once. */
  readonly estimate: Int32Array
  readonly psi: Float64Array
}

/** Σ_ij ψ_i ψ_j κ(d_ij/D); keys of the influence are rows of the table. May be negative. */
export function spatialVariance(influence: Influence, places: SpatialPlaces): number {
  return spatialCovariance([influence], places).matrix[0]
}

/**
 * Covariance matrix of several estimates, row-major L×L. Work goes with the pairs of neighbouring places times the
 * estimates that a place serves. Throws Error where a unit has no position.
 */
export function spatialCovariance(
  influences: readonly Influence[],
  places: SpatialPlaces,
): { matrix: Float64Array; isDiagonal: boolean } {
  const count = influences.length
  const matrix = new Float64Array(count * count)
  const { visited, start, estimate, psi } = byPlace(influences, places)
  const lag = new Float64Array(count)
  const isMet = new Uint8Array(count)
  const met = new Int32Array(count)
  eachNeighbourhood(places, visited, (at, later, kappa, found) => {
    let metCount = 0
    for (let k = 0; k < found; k++) {
      const to = start[later[k] + 1]
      for (let e = start[later[k]]; e < to; e++) {
        const b = estimate[e]
        if (isMet[b] === 0) {
          isMet[b] = 1
          met[metCount++] = b
        }
        lag[b] += kappa[k] * psi[e]
      }
    }
    for (let e = start[at]; e < start[at + 1]; e++) {
      const row = estimate[e]
      for (let other = start[at]; other < start[at + 1]; other++) {
        matrix[row * count + estimate[other]] += psi[e] * psi[other]
      }
    }
    for (let e = start[at]; e < start[at + 1]; e++) {
      const row = estimate[e]
      for (let k = 0; k < metCount; k++) {
        const product = psi[e] * lag[met[k]]
        matrix[row * count + met[k]] += product
        matrix[met[k] * count + row] += product
      }
    }
    for (let k = 0; k < metCount; k++) {
      lag[met[k]] = 0
      isMet[met[k]] = 0
    }
  })
  const isDiagonal = hasDiagonalOnly(matrix, count)
  if (!isDiagonal) shrinkToDefinite(matrix, count)
  return { matrix, isDiagonal }
}

function byPlace(influences: readonly Influence[], { placeOfUnit }: SpatialPlaces): ByPlace {
  const total = influences.reduce((sum, { key }) => sum + key.length, 0)
  const place = new Float64Array(total)
  const holder = new Float64Array(total)
  const value = new Float64Array(total)
  let filled = 0
  influences.forEach(({ key, psi }, line) => {
    for (let i = 0; i < key.length; i++) {
      const own = placeOfUnit[key[i]]
      if (!(own >= 0)) throw new Error(`unit ${key[i]} has no position, a spatial variance needs one`)
      place[filled] = own
      holder[filled] = line
      value[filled++] = psi[i]
    }
  })
  // by value last, so that the sums do not depend on the order of rows
  const order = argsortBy([place, holder, value])
  const visited = new Int32Array(total)
  const start = new Int32Array(total + 1)
  const estimate = new Int32Array(total)
  const psi = new Float64Array(total)
  let [last, entries] = [-1, 0]
  for (const k of order) {
    const isNew = last < 0 || visited[last] !== place[k]
    if (isNew) {
      visited[++last] = place[k]
      start[last] = entries
    }
    if (isNew || estimate[entries - 1] !== holder[k]) estimate[entries++] = holder[k]
    psi[entries - 1] += value[k]
  }
  start[last + 1] = entries
  return { visited: visited.subarray(0, last + 1), start, estimate, psi }
}

function hasDiagonalOnly(matrix: Float64Array, count: number): boolean {
  for (let a = 0; a < count; a++) for (let b = 0; b < a; b++) if (matrix[a * count + b] !== 0) return false
  return true
}

/** The places of a spatial variance; undefined where the variance is another. Throws Error where they are missing. */
export function placesFor(options: {
  readonly variance: string
  readonly spatial?: SpatialPlaces
}): SpatialPlaces | undefined {
  if (options.variance !== 'spatial') return undefined
  if (!options.spatial) throw new Error('the spatial variance needs the places of the units')
  return options.spatial
}

/** Why there is no standard error. */
export function negativeVariance({ cutoffMetres }: SpatialPlaces): string {
  const cutoff = Number(cutoffMetres.toPrecision(4))
  return `the spatial variance is negative: residuals within ${cutoff} m of each other go against each other; try another cutoff`
}
