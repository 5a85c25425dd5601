/** What the report is drawn from. */
import type { Analysis } from '../results.js'

export interface ReportInput {
  readonly analysis: Omit<Analysis, 'units'>
  /** The study with every default filled in, as YAML: printed whole, and asked for the choices that words depend on. */
  readonly resolvedStudy: string
  readonly disclosure: {
    readonly coordinates: boolean
    /** Counts of units above 0 and under this are withheld, and bins with fewer units are not drawn. */
    readonly smallestCell: number
  }
  /** The page's script, `scarp/page-script`: with it a reader can change the bandwidth in the page; without it there is none. */
  readonly script?: string
}
