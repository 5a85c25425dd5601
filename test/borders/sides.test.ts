import { describe, expect, it } from 'vitest'
import { eligible, measureUnits, type SideRule, zonesByRecord } from '../../src/borders/index.js'
import { borderOf, box, columns, metresAround, withProperties, zone } from './makeZones.js'

const at = metresAround(18, -34)
const features = [
  zone('T', box(at, 0, 0, 1000, 1000)),
  zone('U', box(at, 1000, 0, 2000, 1000)),
  zone('V', box(at, 1000, 1000, 2000, 2000)),
]
const border = borderOf(features, ['T'])

/** What each unit's record says, where it stands, and what becomes of it: set aside, by the map, by the record. */
const cases: [
  record: string,
  place: [number, number],
  setAside: string | number,
  map: string | number,
  record: string | number,
][] = [
  ['T', [900, 500], 100, 100, 100],
  ['U', [1200, 500], -200, -200, -200],
  ['U', [990, 500], 'record and map disagree', 10, -10],
  ['U', [980, 400], 'record and map disagree', 20, -20],
  [' T ', [1030, 500], 'record and map disagree', -30, 30],
  ['V', [1040, 500], 'record and map disagree', -40, -40],
  ['', [950, 500], 50, 50, 'zone by the record missing'],
  ['Vv', [940, 500], 'record and map disagree', 60, 'zone by the record is none of the map'],
  ['T', [-20, 500], 'in no zone', 'in no zone', 1020],
  ['', [-20, 600], 'in no zone', 'in no zone', 'in no zone'],
  ['T', [1000, 300], 'exactly on the border', 'exactly on the border', 'exactly on the border'],
]

/** A column of labels as records have it: sorted labels, codes, -1 where missing. */
function column(values: readonly string[]) {
  const labels = [...new Set(values.filter((value) => value !== ''))].sort()
  return { labels, codes: Int32Array.from(values, (value) => labels.indexOf(value)) }
}

const measured = measureUnits(border, ...columns(cases.map(([, [x, y]]) => at(x, y))))
const { recordZone, unknown } = zonesByRecord(border.names, column(cases.map(([record]) => record)))

function judged(onConflict: SideRule['onConflict']) {
  return eligible(border, measured, { metresPerUnit: 1, side: { recordZone, onConflict } })
}

describe('the side by the record and by the map', () => {
  it('reads zones from labels, and lists the labels that name none', () => {
    expect([...recordZone]).toEqual([0, 1, 1, 1, 0, 2, -1, -2, 0, -1, 0])
    expect(unknown).toEqual([{ label: 'Vv', units: 1 }])
  })

  it.each([
    ['set-aside', 2],
    ['map', 3],
    ['record', 4],
  ] as const)('is settled unit by unit: %s', (onConflict, answer) => {
    const { placement, reason } = judged(onConflict)
    const x = new Map(Array.from(placement.unit, (unit, e) => [unit, placement.x[e]]))
    cases.forEach((unit, i) => {
      const wanted = unit[answer]
      if (typeof wanted === 'string') expect([i, reason.labels[reason.codes[i]]]).toEqual([i, wanted])
      else expect(Math.abs((x.get(i) ?? Number.NaN) - wanted)).toBeLessThan(0.1)
    })
    placement.x.forEach((value, e) => {
      expect(placement.treated[e]).toBe(value > 0 ? 1 : 0)
    })
  })

  it('gives one cross-table of units where the two differ, whatever is believed', () => {
    const table = [
      { record: 'U', map: 'T', units: 2 },
      { record: '(missing)', map: '(in no zone)', units: 1 },
      { record: '(missing)', map: 'T', units: 1 },
      { record: '(no zone of the map)', map: 'T', units: 1 },
      { record: 'T', map: '(in no zone)', units: 1 },
      { record: 'T', map: 'U', units: 1 },
      { record: 'V', map: 'U', units: 1 },
    ]
    // the unit on the border counts by the zone the map gives it
    const onLine = border.names[measured.zone[10]]
    const wanted =
      onLine === 'T' ? table : table.map((row) => (row.record === 'T' && row.map === 'U' ? { ...row, units: 2 } : row))
    const sorted = (rows: typeof table) => [...rows].map((row) => JSON.stringify(row)).sort()
    for (const way of ['set-aside', 'map', 'record'] as const)
      expect(sorted([...(judged(way).conflicts ?? [])])).toEqual(sorted(wanted))
    expect(judged('map').conflicts?.[0].units).toBe(2)
    expect(eligible(border, measured, { metresPerUnit: 1 }).conflicts).toBeUndefined()
  })

  it('has no side where the zone by the record has no part in the nearest border of dose', () => {
    const levied = borderOf(
      features.map((feature, i) => withProperties(feature, { levy: i })),
      undefined,
      { dose: 'levy' },
    )
    const units = measureUnits(levied, ...columns([at(990, 500), at(990, 500), at(990, 500)]))
    const { placement, setAside } = eligible(levied, units, {
      metresPerUnit: 1,
      side: { recordZone: Int32Array.of(0, 1, 2), onConflict: 'record' },
    })
    expect(Array.from(placement.x, Math.round)).toEqual([-10, 10])
    expect(Object.fromEntries(setAside)).toEqual({ 'zone by the record has no part in the nearest border': 1 })
  })

  it('is not sure within the position error, and these units are counted', () => {
    const { placement, setAside } = eligible(border, measured, { metresPerUnit: 1, positionErrorMetres: 55 })
    expect(placement.x.every((x) => Math.abs(x) >= 55)).toBe(true)
    expect(setAside.get('within position error')).toBe(5)
  })
})
