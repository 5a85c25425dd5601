/** What the page hands to its script, as JSON: the numbers of results.json and those to re-estimate from. Types only. */
import type { BySide, WhatIfSubject } from '../results.js'
import type { Places } from './numbers.js'

export interface PanelData {
  readonly level: number
  readonly reference: 't' | 'normal'
  /** "95%" */
  readonly levelWords: string
  readonly kernel: string
  readonly order: number
  readonly donut: number
  /** Behind a width: " m", or nothing on a score. */
  readonly unit: string
  readonly axis: string
  /** What bandwidths are measured in: "m", or the name of the score. */
  readonly xUnit: string
  /** "cutoff" and "cutoffs", or what they are here. */
  readonly line: string
  readonly lines: string
  /** Ids and labels; empty with a single line. */
  readonly all: readonly { readonly line: string; readonly label: string }[]
  readonly outcomes: readonly PanelOutcome[]
}

export interface PanelOutcome {
  readonly outcome: string
  readonly places: Places
  readonly pooled: PanelSubject
  /** In the order of `all`. */
  readonly lines: readonly PanelSubject[]
}

/** Both absent where the study has no estimate. */
export interface PanelSubject {
  /** The study's own. */
  readonly own?: PanelEstimate
  readonly again?: WhatIfSubject
}

export interface PanelEstimate {
  readonly bandwidth: BySide
  /** As they may be shown: small counts are withheld. */
  readonly units: BySide<string>
  readonly plain: PanelInterval
  readonly corrected: PanelInterval
}

export interface PanelInterval {
  readonly estimate: number
  readonly low: number
  readonly high: number
  readonly p: number
}
