/** Figures as text: what is drawn, what is not, and that words do not run into each other. */
import { describe, expect, it } from 'vitest'
import { scaleBar } from '../../src/report/figures/mapKey.js'
import { frameAround } from '../../src/report/figures/projection.js'
import { textWidth, wrapText } from '../../src/report/figures/svg.js'
import { drawReport } from '../../src/report/index.js'
import type { ScatterExhibit } from '../../src/results.js'
import { manyLines } from '../fixtures/report/manyLines.js'
import { borderStudy, scoreStudy } from '../fixtures/report/studies.js'

interface Placed {
  readonly x: number
  readonly y: number
  readonly size: number
  readonly anchor: string
  readonly text: string
}

/** Upright texts of a figure, with what they need of room. */
function textsOf(svg: string): Placed[] {
  return [...svg.matchAll(/<text x="([-\d.]+)" y="([-\d.]+)"([^>]*)>([^<]*)<\/text>/g)].map(([, x, y, rest, text]) => ({
    x: Number(x),
    y: Number(y),
    size: Number(/font-size="(\d+)"/.exec(rest)?.[1]),
    anchor: /text-anchor="(\w+)"/.exec(rest)?.[1] ?? 'start',
    text: text.replace(/&lt;/g, '<').replace(/&amp;/g, '&'),
  }))
}

/** Pairs of texts whose boxes overlap, widths taken a little under the estimate that the layout uses. */
function collisions(texts: readonly Placed[]): string[] {
  const boxes = texts.map((placed) => {
    const width = 0.85 * textWidth(placed.text, placed.size)
    const left =
      placed.anchor === 'end' ? placed.x - width : placed.anchor === 'middle' ? placed.x - width / 2 : placed.x
    return {
      ...placed,
      left,
      right: left + width,
      top: placed.y - 0.75 * placed.size,
      bottom: placed.y + 0.2 * placed.size,
    }
  })
  const found: string[] = []
  boxes.forEach((a, index) => {
    for (const b of boxes.slice(index + 1)) {
      if (a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom)
        found.push(`${a.text} | ${b.text}`)
    }
  })
  return found
}

describe('text of figures', () => {
  it('does not run into other text', () => {
    for (const study of [borderStudy(), scoreStudy()]) {
      for (const [name, svg] of drawReport(study)) {
        if (name.endsWith('.svg')) expect(collisions(textsOf(svg)), name).toEqual([])
      }
    }
  })

  it('is wrapped so that no line is wider than asked, words of any length included', () => {
    const lines = wrapText(`short words and ${'x'.repeat(90)} more`, 100, 12)
    for (const line of lines) expect(textWidth(line, 12)).toBeLessThanOrEqual(100)
    expect(lines.join('').replace(/ /g, '')).toBe(`shortwordsand${'x'.repeat(90)}more`)
  })
})

describe('a forest', () => {
  it('names 200 lines page by page on one scale, without a collision, behind a view of all', () => {
    const files = drawReport(manyLines(200))
    const svgOf = (name: string) => files.get(`figures/weeks-in-work-${name}.svg`) as string
    const pages = [1, 2, 3, 4].map((page) => svgOf(`forest-${page}`))
    const all = svgOf('forest')
    for (const svg of [all, ...pages]) expect(collisions(textsOf(svg))).toEqual([])
    const named = pages.map((svg) => textsOf(svg).filter((placed) => placed.text.startsWith('Region')).length)
    expect(named).toEqual([50, 50, 50, 50])
    expect(files.has('figures/weeks-in-work-forest-5.svg')).toBe(false)
    expect(textsOf(all).filter((placed) => placed.text.startsWith('Region')).length).toBe(0)
    expect(all.match(/<circle/g)?.length).toBe(200)
    const ticks = pages.map((svg) =>
      [...svg.matchAll(/<path d="(M[\d.]+) [^"]*" class="s-grid"/g)].map((mark) => mark[1]),
    )
    expect(new Set(ticks.map(String)).size).toBe(1)
  })

  it('names the first 500 of more lines, and draws 200 single lines', () => {
    const files = drawReport(manyLines(630))
    const pages = [...files.keys()].filter((name) => /-forest-\d+\.svg$/.test(name))
    expect(pages.length).toBe(10)
    expect(files.get('report.html')).toContain('the first 500; lines.csv has the others')
    expect([...files.keys()].filter((name) => /-line-\d+\.svg$/.test(name)).length).toBe(200)
    expect(files.get('report.html')).toContain('430 more were left out')
  })

  it('sorts by cutoff', () => {
    const svg = drawReport(scoreStudy()).get('figures/weeks-in-work-forest.svg') as string
    const labels = textsOf(svg).flatMap((placed) => /\(1[89],\d{3}\)|\(2\d,\d{3}\)/.exec(placed.text)?.[0] ?? [])
    expect(labels.length).toBe(25)
    expect([...labels].sort()).toEqual(labels)
  })
})

describe('a scatter', () => {
  it('does not draw a bin under the smallest cell, and says how many are missing', () => {
    const study = scoreStudy()
    const { exhibits, results } = study.analysis
    const pooled = exhibits.outcomes[0].pooled as ScatterExhibit
    const thin = {
      ...pooled,
      bins: pooled.bins.map((bin, index) => (index < 2 ? { ...bin, units: 9, mean: 99 } : bin)),
    }
    const analysis = {
      ...study.analysis,
      results,
      exhibits: { ...exhibits, outcomes: [{ ...exhibits.outcomes[0], pooled: thin }] },
    }
    const circles = (svg: string) => svg.match(/<circle/g)?.length ?? 0
    const before = drawReport(study).get('figures/weeks-in-work-pooled.svg') as string
    const after = drawReport({ ...study, analysis }).get('figures/weeks-in-work-pooled.svg') as string
    expect(circles(before) - circles(after)).toBe(2)
    expect(after).toContain('2 bins with fewer than 10 units not drawn.')
  })
})

describe('a map', () => {
  it('keeps distances: a degree of latitude is 111.2 km on the sphere, also across 180° and near a pole', () => {
    for (const [lon, lat] of [
      [12, 50],
      [180, -17],
      [40, 84],
    ]) {
      const ends = [
        [lon, lat - 0.5],
        [lon > 179 ? -180 : lon, lat + 0.5],
      ]
      const frame = frameAround([ends], 760, [300, 620])
      const [[x0, y0], [x1, y1]] = ends.map(frame.project)
      expect(Math.hypot(x1 - x0, y1 - y0) * frame.metresPerPixel).toBeCloseTo((6371008.8 * Math.PI) / 180, -2)
      expect(y1).toBeLessThan(y0)
    }
  })

  it('draws a scale bar of the length it says, in the system of the study', () => {
    const lengthOf = (marks: string[]) => {
      const [, from, to] = /M([\d.]+) [\d.]+v8H([\d.]+)/.exec(marks[1]) as RegExpExecArray
      return Number(to) - Number(from)
    }
    const words = (marks: string[]) => />([^<]+)</.exec(marks[0])?.[1]
    for (const [metresPerPixel, unit, says, metres] of [
      [10, 'm', '1 km', 1000],
      [2, 'm', '200 m', 200],
      [1234, 'km', '100 km', 100000],
      [25, 'mi', '2 mi', 3218.688],
      [1, 'ft', '200 ft', 60.96],
    ] as const) {
      const bar = scaleBar(metresPerPixel, unit, 700, 0)
      expect(words(bar)).toBe(says)
      expect(lengthOf(bar) * metresPerPixel).toBeCloseTo(metres, -Math.log10(metresPerPixel * 0.05))
    }
  })

  it('colours a piece for each estimate and dashes each piece set aside', () => {
    const study = borderStudy()
    const svg = drawReport(study).get('figures/map.svg') as string
    const map = study.analysis.exhibits.map
    const aside = map?.pieces.filter((piece) => piece.line === null).length ?? 0
    expect(svg.match(/stroke="rgb\(/g)?.length).toBe(26)
    expect(svg.match(/stroke-dasharray="6 5"/g)?.length).toBe(aside + 1)
    expect(/(?<![\d.])(?:12\.4\d|51\.3\d)/.test(svg)).toBe(false)
  })

  it('shows single units where the study has asked for their places, and warns of it', () => {
    const study = borderStudy()
    const { exhibits } = study.analysis
    const points = [
      [12.5, 51.34],
      [12.45, 51.33],
      [12.45, 51.33000001],
    ] as const
    const map = exhibits.map && { ...exhibits.map, points }
    const files = drawReport({ ...study, analysis: { ...study.analysis, exhibits: { ...exhibits, map } } })
    const svg = files.get('figures/points-map.svg') as string
    // two of the three fall on one pixel
    expect(/<path d="((?:M\d+ \d+h0)+)"/.exec(svg)?.[1].match(/M/g)?.length).toBe(2)
    expect(files.get('report.html')).toContain('This report shows where single units are')
    const before = drawReport(study)
    expect(before.has('figures/points-map.svg')).toBe(false)
    expect(before.get('report.html')).not.toContain('where single units are')
  })
})
