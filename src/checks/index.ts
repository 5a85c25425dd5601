/** Door of the checks room: whether what a study rests on holds, and what it could find. */

export { type Audit, type AuditHalf, type AuditOutcome, auditLine } from './audit.js'
export { type BinnedDensity, type BinnedDensityOutcome, binnedDensityTest } from './binnedDensity.js'
export { type DensityOutcome, type DensityTest, densityTest } from './density.js'
export { type DiscreteDensity, type DiscreteDensityOutcome, discreteDensityTest } from './discreteDensity.js'
export { type Heap, type Heaping, type HeapingOutcome, type HeapingRow, heapingOf } from './heaping.js'
export { type JointOutcome, type JointTest, jointTest } from './joint.js'
export { type Moran, type MoranOutcome, moran, type Neighbourhood } from './moran.js'
export { moranNearLine, type NearLine, residualsNearLine } from './moranNearLine.js'
export { benjaminiHochberg, holm } from './multiplicity.js'
export {
  type EffectFound,
  fewestPlacebos,
  judgePlacebos,
  type PlaceboRank,
  type PlaceboVerdict,
  type PlaceRank,
  rankAmongPlacebos,
} from './placebo.js'
export {
  type Assumptions,
  boundaryConstant,
  detectableInStandardErrors,
  plannedStandardError,
  powerAt,
  timesTheUnits,
} from './planning.js'
export {
  type BalancedWindow,
  balancedWindow,
  type Randomisation,
  type RandomisationOutcome,
  randomisationTest,
} from './randomisation.js'
