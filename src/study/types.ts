/** A study with every default filled in. Keys follow the study file, in camelCase. */

export interface Study {
  readonly title: string
  readonly records: RecordsPart
  readonly outcomes: readonly string[]
  readonly line: ScoreLine | BorderLine | DistanceLine
  readonly estimation: EstimationPart
  readonly pooling: PoolingPart
  /** Column of the treatment really received; absent: everyone on the treated side receives it, nobody else. */
  readonly takeUp?: string
  /** Columns taken out of the outcome with coefficients common to both sides. */
  readonly covariates: readonly string[]
  /** Columns that must not jump. */
  readonly predetermined: readonly string[]
  readonly checks: 'none' | 'standard' | 'full'
  /** Column that should jump at every line, and at no other place: lines where it does not are listed. */
  readonly audit?: string
  /** Two lines between whose cutoffs the effect is estimated too, under parallel untreated curves. */
  readonly away?: { readonly low: string; readonly high: string; readonly bandwidth?: number }
  readonly disclosure: DisclosurePart
  readonly variants: readonly Variant[]
  readonly plan: PlanPart
  readonly seed: number
}

/** The study with some keys written otherwise. */
export interface Variant {
  readonly name: string
  /** The keys as written. */
  readonly overrides: Readonly<Record<string, unknown>>
  /** Whole, and without variants of its own. */
  readonly study: Study
}

export interface RecordsPart {
  /** Path as written in the study, relative to the study file. */
  readonly file: string
  readonly id?: string
  /** [longitude column, latitude column], or a column of WKT points. */
  readonly position?: readonly [string, string] | string
  /** What the positions are, where they are not WGS 84 degrees: `EPSG:5070`. */
  readonly crs?: string
  /** Which layer of a file of points. */
  readonly layer?: string
  /** SQL condition over the file's columns. */
  readonly keep?: string
  readonly weight?: string
  /** One column, or two that cross. */
  readonly cluster?: string | readonly [string, string]
}

export type TreatedSide = 'at-or-above' | 'above' | 'at-or-below' | 'below'

export type Cutoff =
  | { readonly kind: 'value'; readonly value: number }
  | { readonly kind: 'column'; readonly column: string }
  | {
      readonly kind: 'schedule'
      readonly file: string
      readonly by: readonly string[]
      readonly value: string
      /** Which of `by` is time: cutoffs that move from one time to the next are compared at the same place. */
      readonly period?: string
    }
  | { readonly kind: 'ladder'; readonly steps: readonly number[] }

export interface ScoreLine {
  readonly kind: 'score'
  readonly score: string
  readonly cutoff: Cutoff
  readonly treated: TreatedSide
  /** Columns whose values tell lines apart; absent: the schedule's `by`, the ladder's steps, or the distinct cutoffs. */
  readonly compareBy?: readonly string[]
  readonly rescale: 'none' | 'spread'
}

export type LengthUnit = 'm' | 'km' | 'ft' | 'mi'

/** A file of geometries; the rest where the file does not say it. */
export interface LayerSource {
  readonly file: string
  /** Which of its layers. */
  readonly layer?: string
  /** The column of WKT, in a table. */
  readonly geometry?: string
  /** Its coordinate system: `EPSG:5070`. */
  readonly crs?: string
}

export interface LayerNear extends LayerSource {
  /** Metres. */
  readonly within: number
}

export interface BorderLine {
  readonly kind: 'border'
  readonly zones: LayerSource
  readonly zoneName: string
  /** Names of treated zones, or a property and the value that marks them; absent where `dose` is given. */
  readonly treated?: readonly string[] | { readonly property: string; readonly equals: string | number | boolean }
  /** Numeric property of the zones: the border runs between zones that differ in it, the higher one treated. */
  readonly dose?: string
  /** What units in no zone are: set aside, or untreated. */
  readonly outside: 'set-aside' | 'untreated'
  readonly unit: LengthUnit
  /** Metres. */
  readonly snap: number
  /** In `unit`. */
  readonly piece: number
  /** A file that `measure` wrote: its geometry is taken where zones, records and options are those it was made from. */
  readonly measured?: string
  /** In `unit`; absent: no limit. */
  readonly reach?: number
  readonly barriers: readonly LayerNear[]
  /** Borders of other jurisdictions. */
  readonly overlaps: readonly LayerNear[]
  /** Spacing of estimates along the border, in `unit`; absent: none. */
  readonly along?: number
  /** Column with the zone by the record. */
  readonly side?: string
  readonly onConflict: 'set-aside' | 'map' | 'record'
  /** Metres; a bandwidth under twice this is refused, and units nearer to the border than this are set aside. */
  readonly positionError: number
  /** In `unit`: units whose foot is this near to a point where three zones meet are set aside; 0: none. */
  readonly corner: number
  /** Degrees: pieces that turn by more are set aside; absent: none. */
  readonly largestTurn?: number
  /** What to do about units that share one position. */
  readonly repeatedPoints: 'keep' | 'cluster' | { readonly cap: number }
}

export interface DistanceLine {
  readonly kind: 'distance'
  /** Column of signed distances, positive where treated. */
  readonly distance: string
  /** Column that says which line. */
  readonly name?: string
  /** Whether the lines are pieces of one border: pooled estimates are then clustered by them, as those of a border are. */
  readonly pieces: boolean
}

export type KernelName = 'triangular' | 'epanechnikov' | 'uniform'
export type VarianceName = 'hc0' | 'hc1' | 'hc2' | 'hc3' | 'neighbours' | 'clusters' | 'few-clusters'

/**
 * How wide: a rule, or numbers in x units. `bias` is the bias bandwidth where the user gives one.
 * `scale` (variants alone) multiplies what the rule answers.
 */
export type Bandwidth =
  | { readonly kind: 'rule'; readonly rule: 'mse' | 'coverage'; readonly bias?: number; readonly scale?: number }
  | { readonly kind: 'fixed'; readonly untreated: number; readonly treated: number; readonly bias?: number }

/** A table with one row a line: the columns that name it, and the one that holds its share. */
export interface SharesFile {
  readonly shares: string
  /** One column with its key or label, the parts of its key, or the two zones of a border. */
  readonly line: readonly string[]
  readonly value: string
}

export interface EstimationPart {
  readonly order: 0 | 1 | 2 | 3
  readonly kernel: KernelName
  readonly bandwidth: Bandwidth
  readonly sides: 'common' | 'separate'
  /** The one to quote; both are computed where they exist. auto: corrected, but bias-aware where the score has few values. */
  readonly interval: 'auto' | 'corrected' | 'bias-aware'
  /** Bound on the second derivative for the bias-aware interval: by rule of thumb, or given. */
  readonly smoothness: 'rule' | number
  /** Absent: `clusters` with records.cluster, else hc2 (and, pooled over border pieces, clustered by piece). */
  readonly variance?: VarianceName
  readonly reference: 't' | 'normal'
  /** Distance at which residuals are no longer related, in the study's unit; absent: not a spatial variance. */
  readonly spatial?: number
  readonly donut: number
  readonly level: number
}

export interface PoolingPart {
  readonly fixedEffects: boolean
  readonly target: 'units' | 'equal' | 'precision' | { readonly column: string } | SharesFile
  /** Column with one value a line that effects are related to; absent: the cutoff, where it differs. */
  readonly slope?: string
}

export interface DisclosurePart {
  readonly coordinates: boolean
  readonly smallestCell: number
}

export interface PlanPart {
  /** Of the outcome: how many units find it; absent: not asked. */
  readonly effect?: number
  readonly power: number
  readonly assume?: PlanAssumptions
}

/** What a plan without pilot records goes by. */
export interface PlanAssumptions {
  /** On both sides of one line. */
  readonly units: number
  /** Of the outcome. */
  readonly sd: number
  /** Share of the outcome's variance that score and covariates explain. */
  readonly rSquared: number
  readonly shareTreated: number
  readonly score: 'normal' | 'uniform'
  /** In standard deviations of the score; absent: all units, straight lines. */
  readonly bandwidth?: number
  readonly lines: number
  readonly intraclassCorrelation: number
  readonly clusterSize: number
}

/** A plan from assumptions alone. */
export interface PlanAlone {
  readonly title: string
  readonly plan: PlanPart & { readonly assume: PlanAssumptions }
  readonly estimation: EstimationPart
}
