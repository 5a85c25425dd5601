/** A border and its measured units as plain data, and back: nothing may differ, whatever the zones are to each other. */
import { describe, expect, it } from 'vitest'
import {
  type Border,
  type BorderOptions,
  borderOfLines,
  eligible,
  type Lines,
  linesOf,
  type Measured,
  measuredOfColumns,
  measureUnits,
  runnerUps,
} from '../../src/borders/index.js'
import {
  borderOf,
  box,
  columns,
  metresAround,
  seeded,
  withProperties,
  type ZoneFeature,
  zone,
  zonesOf,
} from './makeZones.js'

const at = metresAround(8, 50)
const levy = (feature: ZoneFeature, rate: number) => withProperties(feature, { levy: rate })
/** Three zones meet at (2000, 1000); Apart touches none of them. */
const zones = [
  levy(zone('West', box(at, 0, 0, 2000, 3000)), 1),
  levy(zone('East, low', box(at, 2000, 0, 4000, 1000)), 2),
  levy(zone('East "high"', box(at, 2000, 1000, 4000, 3000)), 3),
  levy(zone('Apart', box(at, 20_000, 0, 22_000, 3000)), 3),
]
const treated = ['East, low', 'East "high"']

const random = seeded(11)
const [lon, lat] = columns([
  ...Array.from({ length: 400 }, () => at(random() * 5000 - 500, random() * 4000 - 500)),
  at(21_000, 1500),
  at(2000, 1500),
  at(2000, 1000),
  [Number.NaN, 50],
  [8, Number.NaN],
  [8, 95],
  [Number.POSITIVE_INFINITY, 50],
])

/** What a table keeps of units: texts for zones and pieces, doubles as they are, missing where there is no foot. */
function asColumns({ names, pieces }: Border, { zone: of, piece, distanceMetres, ...rest }: Measured) {
  const several = names.length
  return {
    zone: { codes: of.map((index) => (index === -2 ? several : index)), labels: [...names, '(several)'] },
    severalZones: '(several)',
    nearest: { codes: piece.map((index) => Math.max(index, -1)), labels: pieces.map(({ label }) => label) },
    distanceMetres: distanceMetres.map((metres) => (metres < Infinity ? metres : Number.NaN)),
    ...rest,
  }
}

function again(border: Border, options: BorderOptions): Border {
  const kept = JSON.parse(JSON.stringify(linesOf(border))) as Lines
  const made = borderOfLines(border.zones, options, kept)
  if (!made.ok) throw new Error('the border was refused')
  return made.value
}

const options = { snapMetres: 2, pieceMetres: 700 }
const rules = { metresPerUnit: 1000, reachMetres: 1900, cornerMetres: 60, largestTurnDegrees: 100 }

describe.each<[string, BorderOptions]>([
  ['treated zones', { ...options, treated }],
  ['zones of unlike dose', { ...options, dose: 'levy' }],
  ['the land outside', { ...options, treated, outside: 'untreated' }],
])('lines of %s', (_, chosen) => {
  const border = borderOf(zones, chosen.treated as string[] | undefined, chosen)
  const back = again(border, chosen)
  const measured = measureUnits(border, lon, lat)
  // in more than one zone, as overlaps within the tolerance make it
  measured.zone[7] = -2

  it('make the same border, down to the order in its search tree', () => {
    expect(border.pieces.length).toBeGreaterThan(3)
    expect(back).toEqual(border)
  })

  it('measure units as the border did', () => {
    const anew = measureUnits(back, lon, lat)
    anew.zone[7] = -2
    expect(anew).toEqual(measured)
    expect(runnerUps(back, anew, lon, lat)).toEqual(runnerUps(border, measured, lon, lat))
  })

  it('take units back from columns, with the same places and the same reasons', () => {
    const read = measuredOfColumns(back, lon, lat, asColumns(border, measured))
    if (!read) throw new Error('the columns were refused')
    expect({ ...read, distanceMetres: 0 }).toEqual({ ...measured, distanceMetres: 0 })
    const judged = eligible(back, read, rules)
    const { ground: _, ...expected } = eligible(border, measured, rules)
    expect(judged).toMatchObject(expected)
    const reasons = new Set(Array.from(judged.reason.codes, (code) => judged.reason.labels[code]))
    for (const reason of ['position missing', 'position out of range', 'in more than one zone'])
      expect(reasons).toContain(reason)
  })
})

describe('columns of measured units', () => {
  const chosen = { ...options, treated }
  const border = borderOf(zones, treated, chosen)
  const kept = asColumns(border, measureUnits(border, lon, lat))

  it('are refused where a name is none of the border', () => {
    const renamed = { ...kept.zone, labels: kept.zone.labels.map((name) => name.replace('West', 'Wost')) }
    expect(measuredOfColumns(border, lon, lat, { ...kept, zone: renamed })).toBeUndefined()
    const moved = { ...kept.nearest, labels: kept.nearest.labels.map((label) => label.replace('piece 1', 'piece 91')) }
    expect(measuredOfColumns(border, lon, lat, { ...kept, nearest: moved })).toBeUndefined()
  })

  it('are refused where a zone has the name of several, or two pieces have one label', () => {
    const several = borderOf([...zones, zone('(several)', box(at, 30_000, 0, 31_000, 900))], treated, chosen)
    expect(measuredOfColumns(several, lon, lat, kept)).toBeUndefined()
    const [first, ...others] = border.pieces
    const twice = { ...border, pieces: [first, { ...others[0], label: first.label }, ...others.slice(1)] }
    const { nearest } = kept
    const known = { codes: nearest.codes.map(() => 0), labels: [first.label] }
    expect(measuredOfColumns(twice, lon, lat, { ...kept, nearest: known })).toBeUndefined()
  })
})

describe('a border of other zones', () => {
  it('is refused with what is wrong with them', () => {
    const border = borderOf(zones, treated, options)
    const made = borderOfLines(zonesOf(zones[0], zones[1]), { ...options, treated }, linesOf(border))
    expect(made.ok || made.problems.map(({ found }) => found).join()).toContain('East \\"high\\"')
  })
})
