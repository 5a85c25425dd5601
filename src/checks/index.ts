/** Door of the checks room: whether what a study rests on holds. */
export { holmAdjusted } from './holm.js'
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
