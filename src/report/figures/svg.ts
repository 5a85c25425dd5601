/**
 * SVG as strings. Every mark has presentation attributes, so that a figure stands alone on white paper, and a class,
 * so that the page can give it the colours of the reader's theme. There are no style attributes: the page's policy forbids them.
 */
import { escapeHtml } from '../escape.js'

export type Attributes = Readonly<Record<string, string | number | undefined>>

export function element(name: string, attributes: Attributes, ...children: readonly string[]): string {
  const written = Object.entries(attributes)
    .filter(([, value]) => value !== undefined)
    .map(([key, value]) => ` ${key}="${typeof value === 'number' ? round(value) : escapeHtml(value as string)}"`)
    .join('')
  return children.length === 0 ? `<${name}${written}/>` : `<${name}${written}>${children.join('')}</${name}>`
}

/** Two places are finer than any screen or printer needs. */
export function round(value: number): number {
  if (!Number.isFinite(value)) throw new RangeError(`a figure was given the coordinate ${value}`)
  return Math.round(value * 100) / 100
}

/** Colours on white paper; the page's style sheet names the same classes. */
export const ink = {
  ink: '#1d2126',
  muted: '#5b626b',
  grid: '#dcdfe3',
  untreated: '#2b5c86',
  treated: '#a5400f',
  paper: '#ffffff',
} as const

export type Ink = keyof typeof ink

export const filled = (color: Ink): Attributes => ({ class: `f-${color}`, fill: ink[color] })
export const stroked = (color: Ink, width: number): Attributes => ({
  class: `s-${color}`,
  stroke: ink[color],
  'stroke-width': width,
  fill: 'none',
})
/** Hollow: filled with paper, outlined in the colour. */
export const hollow = (color: Ink, width: number): Attributes => ({
  class: `f-paper s-${color}`,
  fill: ink.paper,
  stroke: ink[color],
  'stroke-width': width,
})

export interface TextOptions {
  readonly size?: number
  readonly anchor?: 'start' | 'middle' | 'end'
  readonly color?: Ink
  readonly weight?: 'bold'
  readonly turned?: boolean
}

export function textAt(x: number, y: number, text: string, options: TextOptions = {}): string {
  const { size = 12, anchor = 'start', color = 'ink', weight, turned } = options
  const place: Attributes = turned ? { transform: `translate(${round(x)} ${round(y)}) rotate(-90)` } : { x, y }
  return element(
    'text',
    {
      ...place,
      ...filled(color),
      'font-size': size,
      'text-anchor': anchor === 'start' ? undefined : anchor,
      'font-weight': weight,
    },
    escapeHtml(text),
  )
}

const narrow = /[iljtfrI.,:;'|()[\]! ]/
const broad = /[mwMW@%]/
const capital = /[A-Z0-9−–+<>=]/

/** Width of a line of sans-serif text, estimated on the wide side so that what is planned with it does not collide. */
export function textWidth(text: string, size: number): number {
  let ems = 0
  for (const character of text) {
    if (narrow.test(character)) ems += 0.37
    else if (broad.test(character)) ems += 0.95
    else if (capital.test(character)) ems += 0.67
    else if (character > '\u2e7f') ems += 1.05
    else ems += 0.615
  }
  return ems * size
}

/** Breaks text into lines no wider than `width`; a word that is too long is broken inside. */
export function wrapText(text: string, width: number, size: number): string[] {
  const lines: string[] = []
  let line = ''
  for (const word of text.split(/\s+/).filter((part) => part !== '')) {
    const longer = line === '' ? word : `${line} ${word}`
    if (textWidth(longer, size) <= width) {
      line = longer
      continue
    }
    if (line !== '') lines.push(line)
    line = word
    while (textWidth(line, size) > width && line.length > 1) {
      let kept = line.length - 1
      while (kept > 1 && textWidth(line.slice(0, kept), size) > width) kept--
      lines.push(line.slice(0, kept))
      line = line.slice(kept)
    }
  }
  if (line !== '' || lines.length === 0) lines.push(line)
  return lines
}

export interface Drawing {
  /** Unique in the page. */
  readonly id: string
  readonly width: number
  readonly height: number
  readonly title: string
  readonly description: string
  readonly body: readonly string[]
}

/** A whole figure with its text alternative. */
export function drawing({ id, width, height, title, description, body }: Drawing): string {
  return element(
    'svg',
    {
      xmlns: 'http://www.w3.org/2000/svg',
      viewBox: `0 0 ${round(width)} ${round(height)}`,
      width,
      height,
      role: 'img',
      'aria-labelledby': `${id}-title ${id}-desc`,
      'font-family': 'system-ui, -apple-system, "Segoe UI", Roboto, "Helvetica Neue", Arial, sans-serif',
    },
    element('title', { id: `${id}-title` }, escapeHtml(title)),
    element('desc', { id: `${id}-desc` }, escapeHtml(description)),
    element('rect', { width, height, class: 'f-background', fill: ink.paper }),
    ...body,
  )
}

/** Bold letters are wider than those that `textWidth` knows. */
const boldFactor = 1.13

/** The heading of a figure: a bold title and quieter lines below, wrapped; returns the marks and the height they take. */
export function heading(title: string, lines: readonly string[], width: number): { marks: string[]; height: number } {
  const marks: string[] = []
  let y = 20
  for (const line of wrapText(title, width / boldFactor, 15)) {
    marks.push(textAt(0, y, line, { size: 15, weight: 'bold' }))
    y += 19
  }
  for (const line of lines.flatMap((text) => wrapText(text, width, 12))) {
    marks.push(textAt(0, y, line, { size: 12, color: 'muted' }))
    y += 16
  }
  return { marks, height: y - 6 }
}
