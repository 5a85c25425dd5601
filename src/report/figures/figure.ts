/** A figure with all that goes with it: its picture, what is seen in it, a caption that stands alone, and its data. */
import { csvText, type Value } from '../csv.js'
import { drawing, heading } from './svg.js'

export interface Figure {
  /** Of its files: figures/NAME.svg, .csv and, of main figures, .pdf. Unique in the report. */
  readonly name: string
  /** What is seen, in words. */
  readonly title: string
  readonly caption: string
  readonly svg: string
  readonly csv: string
  /** Shown when asked for: the same with fitted curves, or page by page. */
  readonly more?: { readonly says: string; readonly figures: readonly Figure[] }
}

/** Full doubles under names of columns; nothing where a value is missing or withheld. */
export interface FigureData {
  readonly columns: readonly string[]
  readonly rows: readonly (readonly Value[])[]
}

export interface Plot {
  readonly name: string
  readonly width: number
  readonly title: string
  /** Below the title: what the marks mean. */
  readonly lines: readonly string[]
  /** For those who do not see it. */
  readonly description: string
  readonly caption: string
  readonly data: FigureData
  /** Marks below the heading, which ends at `top`, and where they end. */
  readonly draw: (top: number, id: string) => { readonly marks: readonly string[]; readonly end: number }
}

export function figureOf({ name, width, title, lines, description, caption, data, draw }: Plot): Figure {
  const id = `figure-${name}`
  const head = heading(title, lines, width)
  const { marks, end } = draw(head.height, id)
  return {
    name,
    title,
    caption,
    svg: drawing({ id, width, height: Math.ceil(end), title, description, body: [...head.marks, ...marks] }),
    csv: csvText(data.columns, data.rows),
  }
}

/** A figure and all that it shows when asked for. */
export function withMore(figure: Figure): readonly Figure[] {
  return [figure, ...(figure.more?.figures ?? []).flatMap(withMore)]
}
