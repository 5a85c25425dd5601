/** What the panel hands out tells of groups, never of a unit: full cells alone, and nothing of a planted record. */
import { describe, expect, it } from 'vitest'
import { type Subject, subjectOf } from '../../src/report/client/again.js'
import type { WhatIfSubject } from '../../src/results.js'
import { analysisOf, type Columns, inputsOf, inventUnits, modelOfPage, pageOf, studyOf } from './whatIfStudies.js'

const smallest = 10
const planted = { y: 987654321.125, score: 61.123456789, near: 0.0123456789, far: 95.987654321 }

/** A line of its own with few units, and units so far out that no cell is full there; all with telling numbers. */
function withPlanted(columns: Columns): Columns {
  const count = columns.score.length
  const rows = [
    { score: planted.near, site: 9 },
    { score: planted.score, site: 9 },
    ...Array.from({ length: 10 }, (_, i) => ({ score: -3 - 2 * i, site: 9 })),
    { score: planted.far, site: 0 },
    { score: -planted.far, site: 0 },
  ]
  return Object.fromEntries(
    Object.entries(columns).map(([name, values]) => {
      const more = rows.map((row) => (name === 'score' ? row.score : name === 'site' ? row.site : values[0]))
      const all = Float64Array.from([...values, ...more])
      if (name === 'y') for (const place of [0, 1, rows.length - 2, rows.length - 1]) all[count + place] = planted.y
      return [name, all]
    }),
  )
}

/** Pooled with a level for each line, that line's few units lie in full cells of all lines; without it they are no line. */
const roads = [
  ['sides', ''],
  ['sides', '# weighted'],
  ['table', '# cluster'],
  ['table', 'pooling: {fixed_effects: true}'],
] as const

const counts = (subject: WhatIfSubject, side: 'untreated' | 'treated') =>
  subject.donuts.map((_, donut) =>
    subject.bandwidths.map((_, place) => subject.units[side][2 * (donut * subject.bandwidths.length + place)]),
  )

/** Numbers given about the cells of one bandwidth, both sides together. */
function numbersOf({ sums, bandwidths }: Subject): number {
  return sums.length / bandwidths.length + 6
}

describe.each(roads)('the panel by %s (%s)', (from, text) => {
  const columns = withPlanted(inventUnits(3000, 2, 8))
  const study = studyOf(`${text}\ndisclosure: {smallest_cell: ${smallest}}`)
  const page = pageOf(study, analysisOf(study, inputsOf(columns)))
  const { data, readyOf } = modelOfPage(page)
  const subjects = data.outcomes.flatMap(({ pooled, lines }) => [pooled, ...lines].flatMap((one) => one.again ?? []))
  const ready = data.outcomes.flatMap(({ pooled, lines }) => [pooled, ...lines].flatMap((one) => readyOf(one) ?? []))

  it('has its estimates where they are looked for', () => {
    const [{ pooled, lines }] = data.outcomes
    expect([pooled, lines[1], lines[2]].map(({ again }) => again?.from)).toEqual([
      from,
      text === '# cluster' ? 'table' : 'sides',
      undefined,
    ])
    expect(ready.length).toBe(subjects.length)
  })

  it('has no cell under the smallest, and none with fewer units than half the numbers given about it', () => {
    for (const { subject } of ready) {
      const again = subjects.find(({ bandwidths }) => bandwidths === subject.bandwidths) as WhatIfSubject
      for (const side of ['untreated', 'treated'] as const) {
        for (const [donut, within] of counts(again, side).entries()) {
          const cells = within.map((units, i) => units - (i > 0 ? within[i - 1] : 0))
          const told = donut === 0 ? cells : cells.filter((units) => units > 0)
          expect(Math.min(...told)).toBeGreaterThanOrEqual(smallest)
          // a unit is a distance and an outcome, on each of two sides
          expect(4 * Math.min(...told)).toBeGreaterThanOrEqual(numbersOf(subject))
        }
        // at the edge itself: nobody, or as many
        const edge = again.units[side].map((units, i, all) => (i % 2 === 1 ? units - all[i - 1] : 0))
        expect(edge.every((units) => units === 0 || units >= smallest)).toBe(true)
      }
    }
  })

  it('says nothing of the planted units: not their numbers, and no mean that one of them could move', () => {
    for (const value of Object.values(planted)) {
      expect(page).not.toContain(String(value))
      expect(page).not.toContain(String(value).slice(0, 9))
    }
    for (const { subject } of ready) {
      const { untreated, treated } = subject.cells
      const all = [untreated, treated].flatMap(({ x, mean, standardError }) => [...x, ...mean, ...standardError])
      for (const value of [...all, ...subject.sums])
        for (const hidden of Object.values(planted)) expect(Math.abs(value - hidden)).not.toBeLessThan(1e-6 * hidden)
      expect(Math.max(...subject.bandwidths)).toBeLessThan(planted.far)
    }
  })
})

it('scores of few values: no edge of a cell on a value that few units have', () => {
  const units = inventUnits(1500, 1, 4)
  const score = units.score.map((value, i) => (i % 50 === 0 ? Math.round(value) + 0.5 : 2 * Math.round(value / 2)))
  const study = studyOf('')
  const { pooled } = analysisOf(study, inputsOf({ ...units, score })).exhibits.outcomes[0].whatIf ?? {}
  expect(pooled?.bandwidths.length).toBeGreaterThan(3)
  for (const h of pooled?.bandwidths ?? []) {
    const ties = score.filter((value) => Math.abs(value) === h).length
    expect(ties === 0 || ties >= 2 * smallest, `${h}: ${ties}`).toBe(true)
  }
})

it('a sample that is too small for a ladder has no panel, and neither has its page', () => {
  const study = studyOf('')
  const analysis = analysisOf(study, inputsOf(inventUnits(90, 1, 4)))
  expect(analysis.results.outcomes[0].pooled).toHaveProperty('corrected')
  expect(analysis.exhibits.outcomes[0].whatIf).toEqual({ pooled: null, lines: [] })
  expect(pageOf(study, analysis)).not.toContain('what-if-data')
})

it('decodes what it encodes', () => {
  const study = studyOf('')
  const { pooled } = analysisOf(study, inputsOf(inventUnits(2000, 1, 4))).exhibits.outcomes[0].whatIf ?? {}
  const subject = subjectOf(pooled as WhatIfSubject)
  expect(subject.sums.length).toBe(90 * subject.bandwidths.length * subject.donuts.length)
  expect(subject.cells.treated.mean.length).toBe(subject.bandwidths.length)
})
