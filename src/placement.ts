/**
 * The one shape in the middle: a unit placed against a line.
 * Cutoffs and borders both end here, and everything after it sees only (line, x).
 */

/** A cutoff on a score, or a piece of border on the ground. */
export interface Line {
  /** Unique, stable text: the key of this line in every output. */
  readonly id: string
  /** What a reader calls it. */
  readonly label: string
  /** In score units; absent where the cutoff is not the same for all units of the line, and for borders. */
  readonly cutoff?: number
  /** [untreated, treated] zone names of a border. */
  readonly zones?: readonly [string, string]
  /** Number of the piece along its pair's border, from 1. */
  readonly piece?: number
  readonly lengthMetres?: number
  /** Dose on the treated side less dose on the other, where zones differ in dose. */
  readonly dose?: number
}

/**
 * One entry for each line that a unit serves (one on a border or a schedule, two on a ladder).
 * All arrays have one element per entry. Entries appear in the order of the units.
 */
export interface Placement {
  readonly lines: readonly Line[]
  /** Row of the unit in its table, from 0. */
  readonly unit: Int32Array
  /** Index into `lines`. */
  readonly line: Int32Array
  /** Signed distance, positive where treated, in the study's unit (score units, or units of length). */
  readonly x: Float64Array
  /** 1 on the treated side; it settles the side of entries with x = 0. */
  readonly treated: Uint8Array
}

/** Units that were not placed, counted by reason; the reason is a short phrase a reader understands. */
export type SetAside = ReadonlyMap<string, number>
