/** Distributions, random numbers, root finding, small linear algebra and sorting: numbers in, numbers out. */
export { base64, base64OfNumbers, numbersOfBase64 } from './base64.js'
export { choleskyInPlace, choleskyInverse, choleskySolveInPlace } from './cholesky.js'
export {
  chiSquareUpper,
  fisherUpper,
  foldedNormalQuantile,
  studentQuantile,
  studentTwoSidedP,
} from './distributions.js'
export { earthCentred, equatorialMetres, flattening, polarMetres, surfaceMetres } from './ellipsoid.js'
export { inverseRootTimes } from './inverseRoot.js'
export { normalCdf, normalQuantile, normalUpper } from './normal.js'
export { lowestOn, rootBetween } from './optimise.js'
export { legendreShifted } from './polynomial.js'
export { quantileOfSorted, standardDeviation } from './quantiles.js'
export { type Random, seededRandom, streamOf } from './random.js'
export { argsort, argsortBy } from './sort.js'
export { sum } from './sums.js'
export { symmetricEigen } from './symmetric.js'
