import { describe, expect, test } from 'vitest'
import { seededRandom } from '../../src/math/index.js'
import { placeByScore, readSchedule, type ScorePlacement, type TreatedSide } from '../../src/thresholds/index.js'
import { labelColumn } from './labelColumn.js'

const scores = (...values: number[]) => Float64Array.from(values)

/** Entries as readable rows: unit, line id, x, treated. */
function entriesOf({ placement }: ScorePlacement): [number, string, number, number][] {
  return Array.from(placement.unit, (unit, e) => [
    unit,
    placement.lines[placement.line[e]].id,
    placement.x[e],
    placement.treated[e],
  ])
}

describe('one cutoff', () => {
  // METHODS section 1, by hand: scores 9, 10, 12 at cutoff 10.
  test.each<[TreatedSide, number[], number[]]>([
    ['at-or-above', [-1, 0, 2], [0, 1, 1]],
    ['above', [-1, 0, 2], [0, 0, 1]],
    ['at-or-below', [1, 0, -2], [1, 1, 0]],
    ['below', [1, 0, -2], [1, 0, 0]],
  ])('treated %s', (treated, x, side) => {
    const { placement } = placeByScore({
      score: scores(9, 10, 12),
      treated,
      cutoff: { kind: 'value', value: 10 },
      rescale: 'none',
    })
    expect(Array.from(placement.x)).toEqual(x)
    expect(Array.from(placement.treated)).toEqual(side)
    expect(placement.lines).toEqual([{ id: '10', label: 'cutoff 10', cutoff: 10 }])
  })

  test('a unit without a finite score is set aside; the line exists even without units', () => {
    const { placement, setAside } = placeByScore({
      score: scores(Number.NaN, Number.POSITIVE_INFINITY),
      treated: 'above',
      cutoff: { kind: 'value', value: 0.5 },
      rescale: 'none',
    })
    expect(placement.unit.length).toBe(0)
    expect(placement.lines).toEqual([{ id: '0.5', label: 'cutoff 0.5', cutoff: 0.5 }])
    expect(Object.fromEntries(setAside)).toEqual({ 'score missing': 1, 'score not finite': 1 })
  })

  test('a cutoff that is not a number is the caller’s fault', () => {
    const input = { score: scores(1), treated: 'above', rescale: 'none' } as const
    expect(() => placeByScore({ ...input, cutoff: { kind: 'value', value: Number.NaN } })).toThrow(RangeError)
  })
})

describe('a column of cutoffs', () => {
  test('one line per distinct cutoff, by number', () => {
    const result = placeByScore({
      score: scores(12, 5, 3, 101, 7),
      treated: 'at-or-above',
      cutoff: { kind: 'column', name: 'pass_mark', values: scores(10, 9, 9, 100, Number.NaN) },
      rescale: 'none',
    })
    expect(result.placement.lines.map((line) => line.id)).toEqual(['9', '10', '100'])
    expect(result.placement.lines.map((line) => line.cutoff)).toEqual([9, 10, 100])
    expect(entriesOf(result)).toEqual([
      [0, '10', 2, 1],
      [1, '9', -4, 0],
      [2, '9', -6, 0],
      [3, '100', 1, 1],
    ])
    expect(Object.fromEntries(result.setAside)).toEqual({ 'cutoff missing': 1 })
  })

  test('compare_by tells lines apart, with a cutoff only where it is the same for the line', () => {
    const result = placeByScore({
      score: scores(12, 5, 3, 101),
      treated: 'at-or-above',
      cutoff: { kind: 'column', name: 'pass_mark', values: scores(10, 9, 9, 100) },
      compareBy: [labelColumn('region', ['North', 'South', 'South', 'North'])],
      rescale: 'none',
    })
    expect(result.placement.lines).toEqual([
      { id: 'North', label: 'region North' },
      { id: 'South', label: 'region South', cutoff: 9 },
    ])
    expect(Array.from(result.placement.line)).toEqual([0, 1, 1, 0])
  })
})

describe('a schedule', () => {
  const schedule = readSchedule({
    by: [
      labelColumn('year', ['2015', '2015', '2016', '2016', '2017']),
      labelColumn('region', ['North', 'South', 'North', 'South', 'North']),
    ],
    value: scores(50, 60, 55, 65, 70),
    lineOfRow: Int32Array.of(2, 3, 4, 5, 6),
    file: 'cutoffs.csv',
    valueName: 'cutoff',
  })
  if (!schedule.ok) throw new Error('the schedule of this test is sound')
  const records = {
    score: scores(51, 59, 40, 70, 66, 1, Number.NaN),
    year: labelColumn('year', ['2016', '2015', '2015', '2015', '2018', null, '2018']),
    region: labelColumn('region', ['South', 'North', 'South', 'North', 'North', 'North', 'North']),
  }
  const place = (compareBy?: readonly ReturnType<typeof labelColumn>[]) =>
    placeByScore({
      score: records.score,
      treated: 'at-or-below',
      cutoff: { kind: 'schedule', schedule: schedule.value, keys: [records.year, records.region] },
      compareBy,
      rescale: 'none',
    })

  test('one line per key that records and schedule share', () => {
    const result = place()
    expect(result.placement.lines).toEqual([
      { id: '2015, North', label: 'year 2015, region North', cutoff: 50 },
      { id: '2015, South', label: 'year 2015, region South', cutoff: 60 },
      { id: '2016, South', label: 'year 2016, region South', cutoff: 65 },
    ])
    expect(entriesOf(result)).toEqual([
      [0, '2016, South', 14, 1],
      [1, '2015, North', -9, 0],
      [2, '2015, South', 20, 1],
      [3, '2015, North', -20, 0],
    ])
    expect(Object.fromEntries(result.setAside)).toEqual({
      'score missing': 1,
      'schedule key missing': 1,
      'no cutoff in the schedule': 1,
    })
    expect(result.missingKeys).toEqual([{ key: 'year 2018, region North', units: 1 }])
  })

  test('compare_by fewer columns than the key', () => {
    const result = place([records.region])
    expect(result.placement.lines).toEqual([
      { id: 'North', label: 'region North', cutoff: 50 },
      { id: 'South', label: 'region South' },
    ])
    expect(Array.from(result.placement.x)).toEqual([14, -9, 20, -20])
  })

  test('a missing compare_by cell sets aside, after the reasons of score and cutoff', () => {
    const result = place([labelColumn('site', [null, 'a', 'b', 'a', null, null, null])])
    expect(Object.fromEntries(result.setAside)).toEqual({
      'score missing': 1,
      'schedule key missing': 1,
      'no cutoff in the schedule': 1,
      'compare_by value missing': 1,
    })
  })
})

describe('a ladder', () => {
  const score = scores(5, 10, 15, 20, 25, 30, 35)
  const steps = scores(10, 20, 30)
  const place = (treated: TreatedSide) =>
    placeByScore({ score, treated, cutoff: { kind: 'ladder', steps }, rescale: 'none' })

  // By hand: the nearest step on each side of the score; on a step, the step's proper side and the next step that way.
  test.each<[TreatedSide, [number, string, number, number][]]>([
    [
      'at-or-above',
      [
        [0, '10', -5, 0],
        [1, '10', 0, 1],
        [1, '20', -10, 0],
        [2, '10', 5, 1],
        [2, '20', -5, 0],
        [3, '20', 0, 1],
        [3, '30', -10, 0],
        [4, '20', 5, 1],
        [4, '30', -5, 0],
        [5, '30', 0, 1],
        [6, '30', 5, 1],
      ],
    ],
    [
      'above',
      [
        [0, '10', -5, 0],
        [1, '10', 0, 0],
        [2, '10', 5, 1],
        [2, '20', -5, 0],
        [3, '10', 10, 1],
        [3, '20', 0, 0],
        [4, '20', 5, 1],
        [4, '30', -5, 0],
        [5, '20', 10, 1],
        [5, '30', 0, 0],
        [6, '30', 5, 1],
      ],
    ],
    [
      'at-or-below',
      [
        [0, '10', 5, 1],
        [1, '10', 0, 1],
        [2, '10', -5, 0],
        [2, '20', 5, 1],
        [3, '10', -10, 0],
        [3, '20', 0, 1],
        [4, '20', -5, 0],
        [4, '30', 5, 1],
        [5, '20', -10, 0],
        [5, '30', 0, 1],
        [6, '30', -5, 0],
      ],
    ],
    [
      'below',
      [
        [0, '10', 5, 1],
        [1, '10', 0, 0],
        [1, '20', 10, 1],
        [2, '10', -5, 0],
        [2, '20', 5, 1],
        [3, '20', 0, 0],
        [3, '30', 10, 1],
        [4, '20', -5, 0],
        [4, '30', 5, 1],
        [5, '30', 0, 0],
        [6, '30', -5, 0],
      ],
    ],
  ])('treated %s', (treated, entries) => {
    expect(entriesOf(place(treated))).toEqual(entries)
  })

  test('no entry reaches past the next step, and every unit is on its step’s proper side', () => {
    const random = seededRandom(4)
    const many = Float64Array.from({ length: 500 }, () => Math.round(random.next() * 40))
    for (const treated of ['at-or-above', 'above', 'at-or-below', 'below'] as const) {
      const { placement } = placeByScore({ score: many, treated, cutoff: { kind: 'ladder', steps }, rescale: 'none' })
      for (let e = 0; e < placement.unit.length; e++) {
        const own = many[placement.unit[e]]
        const k = placement.line[e]
        if (k > 0) expect(own).toBeGreaterThanOrEqual(steps[k - 1])
        if (k < 2) expect(own).toBeLessThanOrEqual(steps[k + 1])
        const above = own > steps[k] || (own === steps[k] && (treated === 'at-or-above' || treated === 'below'))
        expect(placement.treated[e]).toBe(above === treated.endsWith('above') ? 1 : 0)
      }
    }
  })

  test('compare_by and a ladder: combination by step', () => {
    const { placement } = placeByScore({
      score: scores(5, 15, 25),
      treated: 'above',
      cutoff: { kind: 'ladder', steps },
      compareBy: [labelColumn('site', ['b', 'a', 'b'])],
      rescale: 'none',
    })
    expect(placement.lines).toEqual([
      { id: 'a, 10', label: 'site a, cutoff 10', cutoff: 10 },
      { id: 'a, 20', label: 'site a, cutoff 20', cutoff: 20 },
      { id: 'b, 10', label: 'site b, cutoff 10', cutoff: 10 },
      { id: 'b, 20', label: 'site b, cutoff 20', cutoff: 20 },
      { id: 'b, 30', label: 'site b, cutoff 30', cutoff: 30 },
    ])
    expect(Array.from(placement.line)).toEqual([2, 0, 1, 3, 4])
  })

  test('steps that do not ascend are the caller’s fault', () => {
    for (const wrong of [scores(), scores(2, 1), scores(1, 1), scores(1, Number.NaN)]) {
      const cutoff = { kind: 'ladder', steps: wrong } as const
      expect(() => placeByScore({ score, treated: 'above', cutoff, rescale: 'none' })).toThrow(RangeError)
    }
  })
})

describe('rescale: spread', () => {
  test('x in standard deviations of the score within the line; a line without spread is set aside', () => {
    const result = placeByScore({
      score: scores(1, 2, 3, 4, 7, 7, 9),
      treated: 'at-or-above',
      cutoff: { kind: 'column', name: 'mark', values: scores(2, 2, 2, 2, 5, 5, 8) },
      rescale: 'spread',
    })
    // Standard deviation of 1, 2, 3, 4 with n - 1: sqrt(5/3).
    const deviation = Math.sqrt(5 / 3)
    expect(Array.from(result.placement.x)).toEqual([-1 / deviation, 0, 1 / deviation, 2 / deviation])
    expect(Array.from(result.placement.unit)).toEqual([0, 1, 2, 3])
    expect(Object.fromEntries(result.setAside)).toEqual({ 'no spread of the score': 3 })
  })

  test('on a ladder: by the entries of the line; a unit with one entry left is placed', () => {
    const result = placeByScore({
      score: scores(12, 18, 25, 25),
      treated: 'above',
      cutoff: { kind: 'ladder', steps: scores(10, 20, 30) },
      rescale: 'spread',
    })
    // Step 30 has 25, 25 and no spread; step 10 has 12, 18 (sd sqrt(18)); step 20 has 12, 18, 25, 25 (sd sqrt(118/3)).
    expect(entriesOf(result).map(([unit, line]) => [unit, line])).toEqual([
      [0, '10'],
      [0, '20'],
      [1, '10'],
      [1, '20'],
      [2, '20'],
      [3, '20'],
    ])
    expect(result.placement.x[0]).toBeCloseTo(2 / Math.sqrt(18), 14)
    expect(result.placement.x[1]).toBeCloseTo(-8 / Math.sqrt(118 / 3), 14)
    expect(result.setAside.size).toBe(0)
  })
})

describe('whatever the order of rows', () => {
  const count = 400
  const random = seededRandom(11)
  const score = Float64Array.from({ length: count }, () => random.next() * 100)
  const year = Array.from({ length: count }, () => (random.next() < 0.05 ? null : String(8 + random.integer(5))))
  const site = Array.from({ length: count }, () => ['Ash', 'Birch, East', 'Birch'][random.integer(3)])
  const order = Array.from({ length: count }, (_, i) => (i * 147 + 31) % count)
  const scheduleYears = ['8', '9', '10', '11']
  const schedule = readSchedule({
    by: [labelColumn('year', scheduleYears)],
    value: scores(40, 50, 60, 45),
    lineOfRow: Int32Array.of(2, 3, 4, 5),
    file: 'cutoffs.csv',
    valueName: 'cutoff',
  })
  if (!schedule.ok) throw new Error('the schedule of this test is sound')
  const place = (rows: readonly number[], kind: 'schedule' | 'ladder') =>
    placeByScore({
      score: Float64Array.from(rows, (i) => score[i]),
      treated: 'below',
      cutoff:
        kind === 'ladder'
          ? { kind, steps: scores(20, 70) }
          : {
              kind,
              schedule: schedule.value,
              keys: [
                labelColumn(
                  'year',
                  rows.map((i) => year[i]),
                ),
              ],
            },
      compareBy: [
        labelColumn(
          'year',
          rows.map((i) => year[i]),
        ),
        labelColumn(
          'site',
          rows.map((i) => site[i]),
        ),
      ],
      rescale: 'spread',
    })
  const rows = Array.from({ length: count }, (_, i) => i)

  test.each(['schedule', 'ladder'] as const)('%s: the same lines, the same x to the last digit', (kind) => {
    const plain = place(rows, kind)
    const shuffled = place(order, kind)
    expect(shuffled.placement.lines).toEqual(plain.placement.lines)
    expect(shuffled.setAside).toEqual(plain.setAside)
    expect(shuffled.missingKeys).toEqual(plain.missingKeys)
    const byUnit = (result: ScorePlacement, of: (unit: number) => number) =>
      entriesOf(result)
        .map(([unit, ...rest]) => [of(unit), ...rest])
        .sort((a, b) => Number(a[0]) - Number(b[0]) || String(a[1]).localeCompare(String(b[1])))
    expect(byUnit(shuffled, (unit) => order[unit])).toEqual(byUnit(plain, (unit) => unit))
    const units = new Set(plain.placement.unit).size
    expect(units + [...plain.setAside.values()].reduce((sum, n) => sum + n, 0)).toBe(count)
  })

  test('years sort as numbers, and names with a comma make ids of their own', () => {
    const ids = place(rows, 'schedule').placement.lines.map((line) => line.id)
    expect(ids.slice(0, 4)).toEqual(['8, Ash', '8, Birch', '8, "Birch, East"', '9, Ash'])
    expect(ids[ids.length - 1]).toBe('11, "Birch, East"')
    expect(new Set(ids).size).toBe(ids.length)
  })
})

test('a million units on two thousand lines are all placed', () => {
  const count = 1_000_000
  const score = new Float64Array(count)
  const year = new Int32Array(count)
  const site = new Int32Array(count)
  for (let i = 0; i < count; i++) {
    score[i] = (i * 7919) % 1000
    year[i] = Math.floor(i / 100) % 20
    site[i] = (i * 31) % 100
  }
  const years = Array.from({ length: 20 }, (_, k) => String(2000 + k))
  const sites = Array.from({ length: 100 }, (_, k) => `site ${k}`)
  const pairs = years.flatMap((_, y) => sites.map((_, s) => [y, s]))
  const schedule = readSchedule({
    by: [
      { name: 'year', codes: Int32Array.from(pairs, ([y]) => y), labels: years },
      { name: 'site', codes: Int32Array.from(pairs, ([, s]) => s), labels: sites },
    ],
    value: Float64Array.from(pairs, ([y, s]) => 400 + y + s),
    lineOfRow: Int32Array.from(pairs, (_, row) => row + 2),
    file: 'cutoffs.csv',
    valueName: 'cutoff',
  })
  if (!schedule.ok) throw new Error('the schedule of this test is sound')
  const keys = [
    { name: 'year', codes: year, labels: years },
    { name: 'site', codes: site, labels: sites },
  ]
  const cutoff = { kind: 'schedule', schedule: schedule.value, keys } as const
  const { placement } = placeByScore({ score, treated: 'above', cutoff, rescale: 'none' })
  expect(placement.unit.length).toBe(count)
  expect(placement.lines.length).toBe(2000)
})
