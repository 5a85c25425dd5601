/**
 * What analyze returns, report draws and --json prints: types only.
 * Names are those of results.json, so they are snake_case. A number that is missing or infinite is null,
 * with a key of the same name ending in `_reason` beside it.
 */
import type { LedgerStep } from './records/index.js'

export interface Results {
  readonly format: 'scarp-results/1'
  readonly title: string
  readonly version: string
  readonly seed: number
  /** ISO 8601, UTC. */
  readonly started: string
  readonly seconds: number
  readonly inputs: readonly InputFile[]
  /** Where the study names a placement that was measured before. */
  readonly geometry?: GeometryUsed
  readonly placement: PlacementSummary
  readonly lines: readonly LineSummary[]
  /** Border studies. */
  readonly border?: BorderResult
  /** Where the target is by stated shares. */
  readonly target_population?: TargetPopulation
  /** Lines at which a column breaks elsewhere than said; where the study asks for it. */
  readonly audit?: CutoffAudit
  /** Lines that share units; absent where none does. */
  readonly shared_units?: SharedUnits
  /** Jumps of predetermined columns, which should be none; where the study names some and asks for checks. */
  readonly balance?: readonly BalanceRow[]
  readonly outcomes: readonly OutcomeResult[]
  readonly ledger: readonly LedgerStep[]
}

/** Corrected pooled jump of a predetermined column, in its own units and in standard deviations of its untreated units. */
export type BalanceRow = { readonly column: string } & (
  | (Interval & {
      readonly estimate: number
      readonly standard_error: number
      readonly p: number
      /** Over all columns. */
      readonly p_holm: number
      readonly p_bh: number
      readonly bandwidth: BySide
      readonly units: BySide
      /** Of the column among untreated units within the bandwidth. */
      readonly standard_deviation: number
      /** Estimate and interval over that; absent where it is 0. */
      readonly standardised?: Interval & { readonly estimate: number }
    })
  | NotEstimated
)

export interface CutoffAudit {
  readonly column: string
  /** Lines with units enough. */
  readonly audited: number
  readonly not_possible: readonly { readonly line: string; readonly reason: string }[]
  /** Found in one half of a line's units, tested in the other; `at` and `within` in units of x. */
  readonly elsewhere: readonly {
    readonly line: string
    readonly at: number
    readonly within: number
    readonly jump: number
    readonly p: number
    readonly p_holm: number
    readonly p_bh: number
    readonly jump_at_line: number
    readonly p_at_line: number
  }[]
}

export interface GeometryUsed {
  readonly from: string
  readonly reused: boolean
  /** Why it was measured anew. */
  readonly because?: string
}

export interface SharedUnits {
  /** Counted by unit, or by id where an id appears in more than one row. */
  readonly by: 'unit' | 'id'
  readonly serving_several: number
  /** Most shared first, 200 at most. */
  readonly pairs: readonly { readonly lines: readonly [string, string]; readonly count: number }[]
}

export interface InputFile {
  readonly file: string
  readonly sha256: string
  readonly rows?: number
  readonly features?: number
  /** Of layers: the format, the coordinate system and who says so. */
  readonly format?: string
  readonly crs?: string
  readonly crs_from?: string
  /** The farthest that an edge lies from where it was straight in the file's projection, in metres; absent in degrees. */
  readonly edge_m?: number
}

export interface PlacementSummary {
  readonly read: number
  readonly kept: number
  readonly placed: number
  readonly set_aside: Readonly<Record<string, number>>
}

export interface BySide<T = number> {
  readonly untreated: T
  readonly treated: T
}

export interface LineSummary {
  readonly line: string
  readonly label: string
  readonly cutoff?: number
  /** [untreated, treated] */
  readonly zones?: readonly [string, string]
  readonly piece?: number
  readonly length_m?: number
  /** Chord over length, 1 for a straight piece. */
  readonly straightness?: number
  /** Degrees: the largest angle between any two stretches of the piece. */
  readonly largest_turn?: number
  /** Treated less untreated. */
  readonly dose?: number
  readonly units: BySide
  /** Jumps of predetermined columns, corrected; absent without them, and where there are very many. */
  readonly balance?: readonly LineBalance[]
}

export type LineBalance = { readonly column: string } & (
  | { readonly estimate: number; readonly standard_error: number; readonly p: number }
  | NotEstimated
)

/** What the rules of a border study cost and what they found. No coordinate is in it. */
export interface BorderResult {
  /** Rule by rule: what is left of the border, and the units placed on it. */
  readonly waterfall: readonly {
    readonly rule: string
    readonly pieces: number
    readonly km: number
    readonly pairs: number
    readonly units: number
  }[]
  /** What else changes here: share of the border in use along which each layer's own lines run. */
  readonly what_else_changes?: {
    readonly layers: readonly string[]
    readonly whole: LayerShares
    readonly pairs: readonly ({ readonly zones: readonly [string, string] } & LayerShares)[]
  }
  /** Units by the record's zone and the map's, where the two differ. */
  readonly conflicts?: readonly { readonly record: string; readonly map: string; readonly units: number }[]
  /** Points where three zones meet, and pieces in use that turn by more than `turn` degrees: distance alone errs there. */
  readonly corners: { readonly points: number; readonly turn: number; readonly turning_pieces: number }
  readonly repeated_points: {
    readonly units: number
    readonly distinct: number
    /** Share of units that stand where another unit stands. */
    readonly repeated_share: number | null
    readonly repeated_share_reason?: string
    /** `points` points have `units` units each. */
    readonly most: readonly { readonly units: number; readonly points: number }[]
  }
}

export interface LayerShares {
  readonly km: number
  /** In the order of `layers`; null where no border is left. */
  readonly shares: readonly (number | null)[]
}

export interface Estimate {
  readonly estimate: number
  readonly standard_error: number
  /** null under the normal reference. */
  readonly degrees_of_freedom: number | null
  readonly degrees_of_freedom_reason?: string
  readonly low: number
  readonly high: number
  readonly p: number
}

export interface Jump {
  readonly order: number
  readonly kernel: string
  readonly variance: string
  /** Number of clusters, where the variance is clustered. */
  readonly clusters?: number
  /** As many equal ones would give as sure a variance (Carter, Schnepel & Steigerwald 2017). */
  readonly effective_clusters?: number
  readonly units_in_bandwidth: BySide
  readonly bandwidth: BySide
  readonly bias_bandwidth: BySide
  /** Fitted means at x = 0. */
  readonly at_line: BySide
  readonly plain: Estimate
  /** Bias-corrected, with its robust standard error. */
  readonly corrected: Estimate
  /** Worst bias over all curves with a second derivative within `smoothness`; null with a reason where it has none. */
  readonly bias_aware?: BiasAware | null
  readonly bias_aware_reason?: string
  /** The interval to go by: as the study says, else bias-aware where fewer than 10 distinct distances lie within the bandwidth. */
  readonly quoted: 'corrected' | 'bias-aware'
  /** Why it is bias-aware where the study does not say. */
  readonly quoted_because?: string
  /** With take-up, plain and corrected are the effect per unit of it. */
  readonly take_up?: TakeUp
  /** What covariates did to the corrected estimate. */
  readonly covariates?: CovariateReport
  /** Cautions about this estimate, in words. */
  readonly notes?: readonly string[]
}

export interface BiasAware extends Interval {
  readonly estimate: number
  readonly standard_error: number
  readonly worst_bias: number
  readonly smoothness: number
  readonly smoothness_from: 'rule' | 'study'
  readonly bandwidth: BySide
  readonly units_in_bandwidth: BySide
  /** The interval over a range of smoothness. */
  readonly curve?: readonly ({ readonly smoothness: number } & Interval)[]
}

/** The first stage, and the effect of eligibility, which no weakness of it can touch. */
export interface TakeUp {
  /** Of take-up, corrected. */
  readonly jump: number
  readonly standard_error: number
  /** null where nothing is left of its error. */
  readonly f: number | null
  readonly f_reason?: string
  /** Ends are null where the set is unbounded there; an empty list is an empty set. */
  readonly anderson_rubin: readonly (readonly [number | null, number | null])[]
  readonly eligibility: { readonly plain: Estimate; readonly corrected: Estimate }
}

export interface CovariateReport {
  readonly coefficients: Readonly<Record<string, number>>
  /** Constant or a sum of others: left out. */
  readonly left_out: readonly string[]
  /** Corrected estimate with covariates less without (for eligibility, where there is take-up); absent without one. */
  readonly moved?: number
  /** Standard error with over without. */
  readonly standard_error_ratio?: number
}

export interface NotEstimated {
  readonly not_estimated: string
  /** Where it is the ratio that is withheld. */
  readonly take_up?: TakeUp
}

export type LineJump = { readonly line: string } & (Jump | NotEstimated)
export type PooledJump = (Jump & { readonly weights: Readonly<Record<string, number>> }) | NotEstimated

export interface Interval {
  readonly low: number
  readonly high: number
}

/** Whose average a target by stated shares is. */
export interface TargetPopulation {
  /** The column of shares. */
  readonly name: string
  readonly file: string
  /** Sum of the lines' shares. */
  readonly total: number
  /** Rows of a file of shares for no line of the study, and what they hold together; absent where none is. */
  readonly rows_passed_over?: number
  readonly passed_over?: number
}

export type Target =
  | ({
      readonly kind: string
      /** Of all shares, the part at the lines estimated; where the target is by stated shares. */
      readonly covers?: number
      readonly estimate: number
      readonly standard_error: number
      readonly p: number
      readonly weights: Readonly<Record<string, number>>
    } & Interval)
  | NotEstimated

export interface Contrast extends Interval {
  readonly lines: readonly [string, string]
  readonly estimate: number
  readonly standard_error: number
  readonly p: number
  /** Adjusted for the number of pairs: by Holm, and by Benjamini & Hochberg. */
  readonly p_holm: number
  readonly p_bh: number
}

/** Comparison of lines by their corrected estimates; null parts carry a reason. */
export interface Comparison {
  readonly wald: { readonly statistic: number; readonly df: number; readonly p: number }
  /** The same question with each line's degrees of freedom (Welch 1951), of lines that share no unit or cluster. */
  readonly welch?: { readonly statistic: number; readonly df: readonly [number, number]; readonly p: number }
  /** Cochran's Q, on wald.df degrees of freedom. */
  readonly q: number
  /** Percent. */
  readonly i_squared: number
  readonly tau_squared: { readonly dl: number; readonly reml: number; readonly pm: number }
  readonly random_effects: { readonly estimate: number; readonly standard_error: number } & Interval
  /** The same of the other lines, τ² held at that of all; empty with fewer than three lines. */
  readonly random_effects_without: readonly ({
    readonly line: string
    readonly estimate: number
    readonly standard_error: number
  } & Interval)[]
  /** For the effect at a new line like these. */
  readonly prediction: Interval | null
  readonly prediction_reason?: string
  readonly shrunken: readonly ({ readonly line: string; readonly estimate: number } & Interval)[]
  /** Simultaneous intervals; the pairs of smallest p where there are more than `contrasts_of` lists. */
  readonly contrasts: readonly Contrast[]
  /** Number of pairs of lines. */
  readonly contrasts_of: number
  /** Of effects in the cutoff or another attribute of the lines, true effects varying around it; absent where none differs. */
  readonly slope?:
    | ({
        readonly attribute: string
        readonly lines: number
        readonly intercept: number
        readonly estimate: number
        readonly standard_error: number
        readonly p: number
        /** Scaled by the residuals, t on lines − 2 degrees of freedom. */
        readonly knapp_hartung: { readonly standard_error: number; readonly p: number } & Interval
        readonly tau_squared: number
      } & Interval)
    | ({ readonly attribute: string } & NotEstimated)
}

export interface CheckResult {
  readonly check: string
  readonly line?: string
  readonly statistic?: number
  readonly p?: number
  /** Adjusted for the number of tests of its kind: by Holm, and by Benjamini & Hochberg where the tests stand in rows of their own. */
  readonly p_holm?: number
  readonly p_bh?: number
  readonly verdict: 'fine' | 'doubt' | 'fail' | 'not possible'
  readonly says: string
}

export interface StandardsRow {
  readonly requirement: string
  readonly answer: 'met' | 'not met' | 'the program cannot know' | 'not applicable'
  readonly says: string
  /** File of the results folder that shows it. */
  readonly exhibit: string
}

/** A point of the border: pointwise interval, and the band that covers the whole curve. */
export interface AlongResult {
  readonly lon: number
  readonly lat: number
  /** Along its pair's border. */
  readonly position_m: number
  /** Id of its line. */
  readonly piece: string
  readonly estimate: number | null
  readonly standard_error: number | null
  readonly low: number | null
  readonly high: number | null
  readonly uniform_low: number | null
  readonly uniform_high: number | null
  /** Within the bandwidth of the point. */
  readonly units: BySide
  /** Why the point is blank. */
  readonly reason?: string
}

export type AlongAverage =
  | ({ readonly estimate: number; readonly standard_error: number; readonly p: number } & Interval)
  | NotEstimated

/** Effects at scores between a low and a high cutoff, for units of the low one, if untreated curves are parallel. */
export type AwayFromLine = { readonly low: string; readonly high: string } & (
  | {
      /** Of all local lines, in score units. */
      readonly bandwidth: number
      /** Standard errors that the band over all points reaches. */
      readonly critical_value: number
      readonly points: readonly {
        readonly score: number
        readonly estimate: number
        readonly standard_error: number
        readonly uniform_low: number
        readonly uniform_high: number
      }[]
      /** Wald test of the untreated curves being parallel below the low cutoff. */
      readonly parallel: { readonly statistic: number; readonly df: number; readonly p: number } | null
      readonly parallel_reason?: string
    }
  | NotEstimated
)

/** Corrected jumps at a cutoff that moved; all at the bandwidths of the jump after the move. */
export interface MovedCutoffs {
  readonly moves: readonly {
    readonly line: string
    readonly periods: readonly [string, string]
    readonly from: number
    readonly to: number
    /** At the new cutoff. */
    readonly after: Estimate | NotEstimated
    /** At the same place before. */
    readonly before: Estimate | NotEstimated
    readonly difference: Estimate | NotEstimated
    /** At the old cutoff after the move. */
    readonly old_cutoff: Estimate | NotEstimated
  }[]
  /** By precision, normal reference. */
  readonly pooled: { readonly difference: AlongAverage; readonly old_cutoff: AlongAverage }
}

/** A pooled corrected estimate made again; `bandwidth` is h. */
export type Rung =
  | ({
      readonly bandwidth: BySide
      readonly units: BySide
      readonly estimate: number
      readonly standard_error: number
      readonly p: number
      /** Of being the study's own estimate, shared units accounted for. */
      readonly p_difference?: number
    } & Interval)
  | NotEstimated

/** The pooled estimate made again with one choice changed. */
export interface Ladders {
  /** `scale` multiplies the study's own bandwidths. */
  readonly bandwidth: readonly ({ readonly scale: number } & Rung)[]
  /** Units with |x| below `donut` left out, at the study's own bandwidths. */
  readonly donut: readonly ({ readonly donut: number } & Rung)[]
  /** At bandwidths of their own. */
  readonly order_kernel: readonly ({ readonly order: number; readonly kernel: string } & Rung)[]
  /** Lines that are none, at x = `at`, from the units of one side alone. */
  readonly placebo_lines: readonly ({ readonly side: string; readonly at: number } & Rung)[]
}

/** Effects at borders between zones of equal status; which of the two counts as treated is arbitrary. */
export interface PlaceboBorders {
  readonly placebos: readonly ({
    readonly pair: readonly [string, string]
    readonly estimate: number
    readonly standard_error: number
    readonly p: number
    /** Within the bandwidth. */
    readonly units: number
  } & Interval)[]
  readonly not_estimated: readonly { readonly pair: readonly [string, string]; readonly reason: string }[]
  /** Of the real effect by |t|, among the placebo effects and itself; absent where there are too few of these. */
  readonly rank?: number
  readonly of?: number
  readonly p?: number
  /** The same by |estimate|. */
  readonly rank_by_estimate?: number
  readonly p_by_estimate?: number
}

/** Corrected estimate at a line shifted into one side, where nothing changes; the land nearer to the treated counts as treated. */
export interface ShiftedEffect extends Interval {
  readonly side: 'untreated' | 'treated'
  readonly metres: number
  /** Signed distance from the real line, in the study's unit. */
  readonly at: number
  readonly estimate: number
  readonly standard_error: number
  readonly p: number
  readonly p_holm: number
  readonly p_bh: number
  /** Units within the bandwidth. */
  readonly units: number
  /** How far the curve, as drawn, strays from the distance. */
  readonly error_metres: number
}

export interface ShiftedLines {
  readonly shifted: readonly ShiftedEffect[]
  readonly not_estimated: readonly {
    readonly side: 'untreated' | 'treated'
    readonly metres: number
    readonly reason: string
  }[]
}

/** The study with some keys written otherwise. */
export interface VariantResult {
  readonly variant: string
  readonly pooled: PooledJump
  readonly target: Target
  /** Corrected pooled estimate of the variant less the study's own, with the covariance of the two. */
  readonly difference?: {
    readonly estimate: number
    readonly standard_error: number | null
    readonly standard_error_reason?: string
    /** Of no difference, normal reference; absent where there is none to test. */
    readonly p?: number
  }
}

export interface OutcomeResult {
  readonly outcome: string
  readonly along?: readonly AlongResult[]
  /** Means over the points, by length of border and by density of units at it. */
  readonly along_average?: { readonly length: AlongAverage; readonly density: AlongAverage }
  readonly along_critical_value?: number
  /** In the study's unit. */
  readonly along_bandwidth?: { readonly rule: string } & BySide
  readonly lines: readonly LineJump[]
  readonly pooled: PooledJump
  readonly target: Target
  readonly comparison: Comparison | null
  readonly comparison_reason?: string
  readonly checks: readonly CheckResult[]
  /** The target with each line left out in turn. */
  readonly leave_one_out?: readonly ({
    readonly line: string
    readonly estimate: number
    readonly standard_error: number
  } & Interval)[]
  /** Over borders of unlike dose, with the target's weights. */
  readonly per_dose?: { readonly estimate: number; readonly standard_error: number; readonly p: number } & Interval
  /** Between two cutoffs that the study names. */
  readonly away_from_line?: AwayFromLine
  /** Cutoffs that move between the schedule's periods. */
  readonly moved_cutoffs?: MovedCutoffs
  readonly ladders?: Ladders
  readonly placebo_borders?: PlaceboBorders
  readonly shifted_lines?: ShiftedLines
  /** Requirements of the What Works Clearinghouse handbook, in our words. */
  readonly standards?: readonly StandardsRow[]
  readonly variants?: readonly VariantResult[]
}

/* What the report draws beside the numbers. It carries no record, id or unit coordinate. */

export interface Exhibits {
  /** What x is measured in: "m", "km", or the name of the score. */
  readonly xUnit: string
  readonly isBorder: boolean
  readonly outcomes: readonly OutcomeExhibit[]
  readonly map?: MapExhibit
  /** Where the study asks for checks and has units enough. */
  readonly density?: DensityExhibit
}

/** Units near the line: in bins of x on both sides, and the densities that the test compares at the line itself. */
export interface DensityExhibit {
  /** Units per km² of land; else per unit of x. */
  readonly perSquareKm: boolean
  /** From the line outwards on each side; units and density are null where there are fewer units than the smallest cell, but some. */
  readonly bins: readonly {
    readonly side: 'untreated' | 'treated'
    readonly low: number
    readonly high: number
    readonly units: number | null
    readonly density: number | null
  }[]
  readonly atLine: BySide<{ readonly density: number; readonly standardError: number }>
  /** Treated over untreated, at the line. */
  readonly ratio: number
  readonly p: number
  readonly bandwidth: number
  readonly units: BySide
}

export interface OutcomeExhibit {
  readonly outcome: string
  readonly pooled?: ScatterExhibit
  /** Take-up in place of the outcome, at the pooled estimate's bandwidth, also where the ratio is withheld. */
  readonly takeUp?: ScatterExhibit & { readonly column: string } & Pick<
      Jump,
      'bandwidth' | 'units_in_bandwidth' | 'order' | 'kernel'
    >
  /** In the order of `lines`; null where the line has no estimate. */
  readonly lines: readonly (ScatterExhibit | null)[]
  /** What the page re-estimates from; absent: the page has no such panel. */
  readonly whatIf?: WhatIfExhibit
}

/** Null where there is no estimate, or too few units for one to be made again without telling of them one by one. */
export interface WhatIfExhibit {
  readonly pooled: WhatIfSubject | null
  /** In the order of `lines`; empty with a single line, which is the pooled one. */
  readonly lines: readonly (WhatIfSubject | null)[]
}

/**
 * One estimate at a ladder of bandwidths (b = h), three kernels, orders 1 and 2, and some holes at the line. Bandwidths are
 * edges of cells of |x|; no cell has fewer units on a side than half the numbers given about it, nor than the smallest cell.
 */
export interface WhatIfSubject {
  /**
   * `sides`: parts of each side, from which the page makes the estimate. `table`: estimates made beforehand, where the two
   * sides share something: clusters, fixed effects, covariates, take-up, units.
   */
  readonly from: 'sides' | 'table'
  /** Ascending, in x units. */
  readonly bandwidths: readonly number[]
  /** Ascending; the first is the study's own. */
  readonly donuts: readonly number[]
  /** `table` alone: which donut (its place), and which side's bandwidth is not the study's own. */
  readonly variations: readonly { readonly donut: number; readonly side: 'both' | 'untreated' | 'treated' }[]
  /**
   * Doubles as base64, lowest byte first; NaN where there is no estimate. Kernels are triangular, Epanechnikov, uniform.
   * `sides`: [donut][bandwidth][untreated, treated][kernel], in each the [level less `centre`, variance, Σl², Σl⁴] of the
   * orders 1, 2 and 3, and the coefficients of |x|, of |x| and of x² in the curves of order 1 and 2.
   * `table`: [variation][bandwidth][kernel][order 1, 2][plain, corrected][estimate, standard error, degrees of freedom].
   */
  readonly sums: string
  /** Mean outcome, which levels are given without. */
  readonly centre: number
  /** [donut][bandwidth][nearer than the bandwidth, that or at it] */
  readonly units: BySide<readonly number[]>
  /** Cells between neighbouring bandwidths, the first from the study's donut. */
  readonly cells: BySide<WhatIfCells>
}

/** One double per cell, as base64; weighted where the study has weights. */
export interface WhatIfCells {
  /** Mean |x|. */
  readonly x: string
  readonly mean: string
  readonly standardError: string
}

/** Binned means near a line, and the plain fit on both sides. x is signed; y is in outcome units. */
export interface ScatterExhibit {
  readonly bins: readonly ScatterBin[]
  readonly fit: BySide<{ readonly x: readonly number[]; readonly y: readonly number[] }>
}

export interface ScatterBin {
  readonly side: 'untreated' | 'treated'
  readonly low: number
  readonly high: number
  /** Mean x and mean outcome of the bin's units (weighted where the study has weights). */
  readonly x: number
  readonly mean: number
  readonly standardError: number
  readonly units: number
}

export interface MapExhibit {
  readonly zones: readonly {
    readonly name: string
    readonly treated: boolean
    /** GeoJSON MultiPolygon coordinates, WGS 84 degrees. */
    readonly polygons: readonly (readonly (readonly (readonly number[])[])[])[]
  }[]
  readonly pieces: readonly {
    /** Line id where the piece is used; null where it was set aside. */
    readonly line: string | null
    readonly zones: readonly [string, string]
    readonly piece: number
    readonly lengthMetres: number
    /** Why it is not used. */
    readonly setAside?: string
    /** GeoJSON MultiLineString coordinates. */
    readonly coordinates: readonly (readonly (readonly [number, number])[])[]
  }[]
  /** Barrier layers as drawn lines. */
  readonly barriers: readonly {
    readonly name: string
    readonly coordinates: readonly (readonly (readonly number[])[])[]
  }[]
  /** Units placed, counted in squares of a grid that no unit's place decides; absent where none is drawn. */
  readonly cells?: UnitCells
  /** Positions of single units, in degrees, in order of longitude: only where the study asks for coordinates. */
  readonly points?: readonly (readonly [number, number])[]
}

export interface UnitCells {
  readonly sideMetres: number
  /** Units in the cells below, and all. */
  readonly shown: number
  readonly units: number
  /** Edges in degrees; only cells with as many units as the smallest cell. */
  readonly cells: readonly {
    readonly west: number
    readonly south: number
    readonly east: number
    readonly north: number
    readonly units: number
  }[]
}

/** One row of units.csv per placed entry; arrays run parallel. */
export interface UnitRows {
  /** Row of the table. */
  readonly unit: Int32Array
  readonly line: Int32Array
  readonly treated: Uint8Array
  readonly x: Float64Array
  readonly ground?: {
    readonly zone: Int32Array
    readonly zoneNames: readonly string[]
    readonly footLon: Float64Array
    readonly footLat: Float64Array
    readonly positionMetres: Float64Array
  }
}

export interface Analysis {
  readonly results: Results
  readonly exhibits: Exhibits
  readonly units: UnitRows
}

/** What `scarp plan` answers. */
export interface Plan {
  readonly title: string
  readonly from: 'records' | 'assumptions'
  readonly power: number
  readonly level: number
  readonly effect?: number
  /** Smallest detectable effects in standard errors. */
  readonly multiple: number
  readonly rows: readonly PlanRow[]
}

export type PlanRow = { readonly outcome?: string; readonly line: string } & (
  | {
      /** In the bandwidth where there are records, else all. */
      readonly units: number
      readonly standard_error: number
      readonly smallest_detectable: number
      /** Power at the study's effect, and units for its power, all else equal. */
      readonly power_at_effect?: number
      readonly units_needed?: number
      readonly curve: readonly { readonly effect: number; readonly power: number }[]
    }
  | { readonly not_planned: string }
)

/** Two runs side by side. */
export interface ComparedRuns {
  readonly differs: readonly RunDifference[]
  /** The largest move first: those in standard errors, then the others by their share of the larger of the two. */
  readonly moved: readonly MovedNumber[]
  /** Words that changed, as a verdict or a reason does, and numbers that became blank or stopped being so. */
  readonly reworded: readonly Reworded[]
  readonly only: { readonly first: readonly HeldAlone[]; readonly second: readonly HeldAlone[] }
  readonly lines: { readonly appeared: readonly string[]; readonly disappeared: readonly string[] }
  /** What one of the runs estimates and the other does not, with the reason of that one. */
  readonly estimability: readonly {
    readonly what: string
    readonly now: 'estimated' | 'not estimated'
    readonly reason: string
  }[]
  /** Numbers that are equal to the last bit. */
  readonly equal: number
}

/** `key` is an option of the study, `input FILE`, `version` or `geometry`; null where a run has none. */
export interface RunDifference {
  readonly key: string
  readonly first: string | null
  readonly second: string | null
}

/** A place in results.json: `outcomes[soil_kept].pooled.corrected.estimate`, list members by what names them. */
interface NamedLeaf {
  readonly number: string
  readonly path: readonly string[]
  /** Pooled, target, of a line, of the comparison, or the verdict of a check. */
  readonly main: boolean
}

export type LeafValue = number | string | boolean | null

export interface MovedNumber extends NamedLeaf {
  readonly first: number
  readonly second: number
  /** Second less first. */
  readonly difference: number
  /** Of the first run's estimate, or of the second's where that has none; null where neither has one. */
  readonly standard_error: number | null
  readonly in_standard_errors: number | null
}

export interface Reworded extends NamedLeaf {
  readonly first: LeafValue
  readonly second: LeafValue
}

export interface HeldAlone extends NamedLeaf {
  readonly value: LeafValue
}
