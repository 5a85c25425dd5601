import { describe, expect, it } from 'vitest'
import {
  type Border,
  type EligibilityRules,
  eligible,
  layersAlong,
  measureUnits,
  shareNear,
} from '../../src/borders/index.js'
import { borderOf, box, closed, columns, layerOf, metresAround, seeded, zone } from './makeZones.js'

const at = metresAround(-3, 52)
const features = [zone('T', box(at, 0, 0, 5000, 4000)), zone('U', box(at, 5000, 0, 9000, 4000))]
/** Four pieces of 1 km from south to north. */
const border = borderOf(features, ['T'])
/** Beside pieces 1 and 2; beside 60% of piece 2 and all of piece 3; beside 30% of piece 4. */
const river = layerOf('river.geojson', [at(5060, -200), at(5060, 2000)])
const councils = layerOf('councils.geojson', [at(5010, 1400), at(5010, 3000)], [at(4990, 3700), at(4990, 4500)])
const shares = { river: shareNear(border, river, 60.5), councils: shareNear(border, councils, 10.5) }
const barrier = { name: 'river.geojson', share: shares.river }
const overlap = { name: 'councils.geojson', share: shares.councils }

const random = seeded(3)
/** 2,000 units all over both zones, and the easy exceptions. */
const points = [
  ...Array.from({ length: 2000 }, () => at(9000 * random(), 4000 * random())),
  at(-100, 2000),
  [Number.NaN, 52],
  at(5000, 300),
]
const [lon, lat] = columns(points)
const measured = measureUnits(border, lon, lat)

function judged(rules: Partial<EligibilityRules>, of: Border = border) {
  return eligible(of, of === border ? measured : measureUnits(of, lon, lat), { metresPerUnit: 1, ...rules })
}

describe('rules over facts measured once', () => {
  it('count pieces, km, pairs and units, rule by rule, and the last step is the placement', () => {
    const { waterfall, placement, setAside, pieces } = judged({ barriers: [barrier], overlaps: [overlap] })
    expect(waterfall.map(({ rule, pieces: left, pairs }) => [rule, left, pairs])).toEqual([
      ['shared borders', 4, 1],
      ['barrier river.geojson', 2, 1],
      ['overlap councils.geojson', 1, 1],
    ])
    for (const [i, km] of [4, 2, 1].entries()) expect(waterfall[i].km).toBeCloseTo(km, 3)
    const inRow = (row: number) =>
      points.filter((_, i) => i < 2000 && Math.floor(measured.positionMetres[i] / 1000) === row)
    expect(waterfall.map(({ units }) => units)).toEqual([2000, inRow(2).length + inRow(3).length, inRow(3).length])
    expect(placement.unit).toHaveLength(waterfall[2].units)
    expect(Object.fromEntries(setAside)).toEqual({
      'position missing': 1,
      'exactly on the border': 1,
      'in no zone': 1,
      'nearest piece set aside: barrier river.geojson': inRow(0).length + inRow(1).length,
      'nearest piece set aside: overlap councils.geojson': inRow(2).length,
    })
    expect(pieces.map((piece) => piece.setAside)).toEqual([
      'barrier river.geojson',
      'barrier river.geojson',
      'overlap councils.geojson',
      undefined,
    ])
    expect(placement.lines.map(({ id }) => id)).toEqual(['U | T, piece 4'])
  })

  it('give the same with a rule switched off as without ever having had it', () => {
    const on = judged({ barriers: [barrier], overlaps: [overlap] })
    const off = judged({ overlaps: [overlap] })
    const fresh = judged({ overlaps: [overlap] }, borderOf(features, ['T']))
    expect(off).toEqual(fresh)
    expect(judged({ barriers: [barrier], overlaps: [overlap] })).toEqual(on)
    expect(off.placement.unit.length).toBeGreaterThan(on.placement.unit.length)
    expect(off.waterfall.map(({ pieces }) => pieces)).toEqual([4, 2])
  })

  it('say why each unit is not placed, and add up', () => {
    const { reason, setAside, placement } = judged({ barriers: [barrier], reachMetres: 2500, positionErrorMetres: 40 })
    const counts = new Map<string, number>()
    for (const code of reason.codes) {
      if (code >= 0) counts.set(reason.labels[code], (counts.get(reason.labels[code]) ?? 0) + 1)
    }
    expect(Object.fromEntries(counts)).toEqual(Object.fromEntries(setAside))
    expect([...counts.values()].reduce((a, b) => a + b, 0) + placement.unit.length).toBe(points.length)
    const metres = points.map((_, i) => measured.distanceMetres[i])
    const isInside = (i: number) => i < 2000
    expect(setAside.get('within position error')).toBe(metres.filter((d, i) => isInside(i) && d < 40).length)
    expect(setAside.get('beyond reach')).toBe(metres.filter((d, i) => isInside(i) && d > 2500).length)
    expect(placement.x.every((x) => Math.abs(x) >= 40 && Math.abs(x) <= 2500)).toBe(true)
  })

  it('give the same answer under any order of rows and zones', () => {
    const order = points.map((_, i) => (i * 601) % points.length)
    const turned = borderOf([features[1], features[0]], ['T'])
    const [x, y] = columns(order.map((i) => points[i]))
    const rules = { metresPerUnit: 1, barriers: [barrier], reachMetres: 3000 }
    const straight = eligible(border, measured, rules)
    const shuffled = eligible(turned, measureUnits(turned, x, y), rules)
    const of = ({ placement }: typeof straight, rowOf: (unit: number) => number) =>
      Array.from(placement.unit, (unit, e) => [
        rowOf(unit),
        placement.lines[placement.line[e]].id,
        placement.x[e],
        placement.treated[e],
      ]).sort((a, b) => Number(a[0]) - Number(b[0]))
    expect(of(shuffled, (unit) => order[unit])).toEqual(of(straight, (unit) => unit))
    expect(shuffled.waterfall).toEqual(straight.waterfall)
  })

  it('throw where a list does not fit or a rule is no number', () => {
    expect(() => judged({ barriers: [{ name: 'r', share: new Float64Array(3) }] })).toThrow('r has 3 shares')
    expect(() => judged({ cornerMetres: Number.NaN })).toThrow(RangeError)
    expect(() => judged({ metresPerUnit: 0 })).toThrow(RangeError)
    expect(() => judged({ reachMetres: Number.NaN })).toThrow(RangeError)
    expect(() => judged({ side: { recordZone: new Int32Array(2), onConflict: 'map' } })).toThrow('2 zones for 2003')
  })
})

describe('what else changes here', () => {
  // T has U to its east (4 km of border) and V to its north (5 km)
  const map = borderOf([...features, zone('V', box(at, 0, 4000, 5000, 6000))], ['T'])
  const layers = [
    // half of T|U and nothing of T|V but the corner's surroundings
    { name: 'districts', lines: [[at(5005, -300), at(5005, 2000)]], within: 6 },
    // all of T|V
    { name: 'schools', lines: [[at(-50, 4000), at(5050, 4000)]], within: 1 },
    { name: 'parks', lines: [[at(1000, 1000), at(2000, 1000)]], within: 100 },
  ].map(({ name, lines, within }) => ({ name, share: shareNear(map, layerOf(name, ...lines), within) }))

  it('is a table of pairs and layers with known shares of length', () => {
    const { whole, pairs, layers: names } = layersAlong(map.pieces, layers)
    expect(names).toEqual(['districts', 'schools', 'parks'])
    expect(pairs.map(({ zones }) => zones.join(' | '))).toEqual(['U | T', 'V | T'])
    const known = [
      [0.5, 0, 0],
      [0, 1, 0],
    ]
    pairs.forEach(({ shares: found, km }, i) => {
      expect(km).toBeCloseTo([4, 5][i], 1)
      found.forEach((share, k) => {
        expect(Math.abs(share - known[i][k])).toBeLessThan(0.002)
      })
    })
    const overall = [2 / 9, 5 / 9, 0]
    whole.shares.forEach((share, k) => {
      expect(Math.abs(share - overall[k])).toBeLessThan(0.002)
    })
  })

  it('leaves out what is set aside', () => {
    const { pieces } = eligible(map, measureUnits(map, new Float64Array(0), new Float64Array(0)), {
      metresPerUnit: 1,
      overlaps: [layers[1]],
    })
    const { pairs } = layersAlong(pieces, layers)
    expect(pairs.map(({ zones }) => zones.join(' | '))).toEqual(['U | T'])
  })
})

describe('kinked pieces', () => {
  // T is a block of 2 km, U lies around two of its sides: a border with one right angle
  const own = zone('T', box(at, 0, 0, 2000, 2000))
  const around = zone('U', closed([at(2000, 0), at(4000, 0), at(4000, 4000), at(0, 4000), at(0, 2000), at(2000, 2000)]))

  it('are set aside where they turn by more than the rule allows', () => {
    const bent = borderOf([own, around], ['T'], { pieceMetres: 4000 / 3 })
    expect(bent.pieces.map((piece) => Math.round(piece.largestTurnDegrees))).toEqual([0, 90, 0])
    const [x, y] = columns([at(200, 1900), at(1900, 1900), at(1900, 200)])
    const { placement, setAside, waterfall } = eligible(bent, measureUnits(bent, x, y), {
      metresPerUnit: 1,
      largestTurnDegrees: 60,
    })
    expect([...placement.unit]).toEqual([0, 2])
    expect(Object.fromEntries(setAside)).toEqual({ 'nearest piece set aside: turns by more than 60 degrees': 1 })
    expect(waterfall[1]).toMatchObject({ rule: 'turns by more than 60 degrees', pieces: 2, units: 2 })
  })
})
