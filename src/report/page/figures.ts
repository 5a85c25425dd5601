/** Figures in the page: the picture in a box of its own, its caption, its files; what is behind it opens when asked for. */
import { escapeHtml } from '../escape.js'
import type { Figure } from '../figures/figure.js'

/** Numbers figures in the order in which they are shown. */
export type ShowFigures = (figures: readonly Figure[]) => string

const tallerThan = 1100

export function numberedFigures(): ShowFigures {
  let number = 0
  return (figures) => figures.map((figure) => figureHtml(figure, `Figure ${++number}`)).join('\n')
}

function figureHtml(figure: Figure, number: string): string {
  const { name, title, caption, svg, more } = figure
  const height = Number(/ height="([\d.]+)"/.exec(svg)?.[1])
  const inner = more
    ? `\n<details><summary>${escapeHtml(`${number}, ${more.says}`)}</summary>\n${more.figures.map((one, i) => figureHtml(one, more.figures.length > 1 ? `${number}, part ${i + 1}` : `${number}, ${more.says}`)).join('\n')}\n</details>`
    : ''
  return `<figure><div class="drawing${height > tallerThan ? ' tall' : ''}" tabindex="0" role="region" aria-label="${escapeHtml(`${number}: ${title}`)}">${svg}</div><figcaption><b>${escapeHtml(`${number}. ${title}.`)}</b> ${escapeHtml(caption)} <span class="files">${links(name, number)}</span></figcaption>${inner}</figure>`
}

function links(name: string, number: string): string {
  return ['svg', 'pdf', 'csv']
    .map(
      (kind) =>
        `<a href="figures/${name}.${kind}" aria-label="${escapeHtml(`${number} as ${kind.toUpperCase()}`)}">${kind.toUpperCase()}</a>`,
    )
    .join(' · ')
}
