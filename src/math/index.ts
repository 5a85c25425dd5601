/** Distributions, random numbers, optimisers, sums, small linear algebra and sorting: numbers in, numbers out. */
export { choleskyInPlace, choleskyInverse, choleskySolveInPlace } from './cholesky.js'
export {
  chiSquareQuantile,
  chiSquareUpper,
  foldedNormalQuantile,
  fUpper,
  studentCdf,
  studentQuantile,
  studentTwoSidedP,
} from './distributions.js'
export { earthCentred, equatorialMetres, flattening, polarMetres, surfaceMetres } from './ellipsoid.js'
export { type LeastSquares, leastSquares } from './leastSquares.js'
export { normalCdf, normalQuantile, normalUpper } from './normal.js'
export { goldenMinimum, rootBetween } from './optimise.js'
export { legendreShifted, legendreToMonomial } from './polynomial.js'
export { quantileOfSorted, standardDeviation } from './quantiles.js'
export { type Random, seededRandom, streamOf } from './random.js'
export { argsort, argsortBy } from './sort.js'
export { logGamma } from './specialFunctions.js'
export { meanOf, sum } from './sums.js'
export { quadraticFormPseudoInverse, symmetricEigen } from './symmetric.js'
