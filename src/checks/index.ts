/** Door of the checks room: whether what a study rests on holds, and what it could find. */

export { type Audit, type AuditHalf, type AuditOutcome, auditLine } from './audit.js'
export { type DensityOutcome, type DensityTest, densityTest } from './density.js'
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
