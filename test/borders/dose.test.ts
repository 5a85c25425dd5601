import { describe, expect, it } from 'vitest'
import { splitsByDose } from '../../src/borders/dose.js'
import { eligible, measureUnits, runnerUps } from '../../src/borders/index.js'
import { borderOf, box, columns, metresAround, problemsOf, seeded, withProperties, zone } from './makeZones.js'

const at = metresAround(8, 50)
/**
 * Four columns 2 km wide with a levy of 1, 3, 3 and 2, and one zone of levy 3 apart from them:
 * West | Mid 1 differs by 2, Mid 1 | Mid 2 by nothing, East | Mid 2 by 1.
 */
const levied = [
  withProperties(zone('West', box(at, 0, 0, 2000, 3000)), { levy: 1 }),
  withProperties(zone('Mid 1', box(at, 2000, 0, 4000, 3000)), { levy: 3 }),
  withProperties(zone('Mid 2', box(at, 4000, 0, 6000, 3000)), { levy: 3 }),
  withProperties(zone('East', box(at, 6000, 0, 8000, 3000)), { levy: 2 }),
  withProperties(zone('Apart', box(at, 20_000, 0, 22_000, 3000)), { levy: 3 }),
]
const border = borderOf(levied, undefined, { dose: 'levy', pieceMetres: 1e6 })

describe('borders of dose', () => {
  it('lie where the dose differs, higher dose on the treated side', () => {
    expect(border.pieces.map(({ zones, dose }) => [zones.join(' | '), dose])).toEqual([
      ['East | Mid 2', 1],
      ['West | Mid 1', 2],
    ])
    expect([...border.treatedZone]).toEqual([0, 1, 1, 1, 1])
    expect(border.corners).toEqual([])
  })

  it('serve units of their own two zones alone', () => {
    const points = [
      at(1900, 1500), // West, 100 m below the border of Mid 1
      at(2300, 1500), // Mid 1
      at(3900, 1500), // Mid 1: 1,900 m from its own border
      at(4100, 1500), // Mid 2: nearer to West | Mid 1 (2,100 m) or to its own (1,900 m)?
      at(4900, 1500), // Mid 2
      at(7000, 1500), // East
      at(21_000, 1500), // Apart
      at(-10, 1500), // in no zone
    ]
    const [lon, lat] = columns(points)
    const { placement, setAside } = eligible(border, measureUnits(border, lon, lat), { metresPerUnit: 1 })
    const lines = Array.from(placement.line, (line) => placement.lines[line].zones?.join(' | '))
    expect(lines).toEqual([
      'West | Mid 1',
      'West | Mid 1',
      'West | Mid 1',
      'East | Mid 2',
      'East | Mid 2',
      'East | Mid 2',
    ])
    const metres = [-100, 300, 1900, 1900, 1100, -1000]
    placement.x.forEach((x, e) => {
      // the columns are drawn to scale at their southern end
      expect(Math.abs(x / metres[e] - 1)).toBeLessThan(0.001)
    })
    expect([...placement.treated]).toEqual([0, 1, 1, 1, 1, 0])
    expect(placement.lines.map(({ dose }) => dose)).toEqual([1, 2])
    expect(Object.fromEntries(setAside)).toEqual({
      'own zone has no border where the dose differs': 1,
      'in no zone': 1,
    })
  })

  it('never serve a unit of another zone, though it be nearer', () => {
    // Mid 2 is thin here: its units lie nearer to West | Mid 1's border than to their own
    const thin = [
      withProperties(zone('West', box(at, 0, 0, 2000, 3000)), { levy: 1 }),
      withProperties(zone('Mid 1', box(at, 2000, 0, 2500, 3000)), { levy: 3 }),
      withProperties(zone('Mid 2', box(at, 2500, 0, 6000, 3000)), { levy: 3 }),
      withProperties(zone('East', box(at, 6000, 0, 8000, 3000)), { levy: 2 }),
    ]
    const narrow = borderOf(thin, undefined, { dose: 'levy', pieceMetres: 1e6 })
    const [lon, lat] = columns([at(2600, 1000)])
    const measured = measureUnits(narrow, lon, lat)
    expect(narrow.pieces[measured.piece[0]].zones).toEqual(['East', 'Mid 2'])
    expect(Math.abs(measured.distanceMetres[0] / 3400 - 1)).toBeLessThan(0.001)
    expect([...runnerUps(narrow, measured, lon, lat).piece]).toEqual([-1])
  })

  it('agree with naming the treated zones where there are two doses', () => {
    const two = levied.slice(0, 4).map((feature, i) => withProperties(feature, { levy: i % 2 }))
    const byDose = borderOf(two, undefined, { dose: 'levy' })
    const byName = borderOf(two, ['Mid 1', 'East'])
    expect(byDose.pieces.map(({ dose, ...piece }) => piece)).toEqual(byName.pieces)
    const random = seeded(2)
    const [lon, lat] = columns(Array.from({ length: 300 }, () => at(8000 * random(), 3000 * random())))
    const [dose, name] = [byDose, byName].map((way) => eligible(way, measureUnits(way, lon, lat), { metresPerUnit: 1 }))
    expect(dose.placement.unit).toEqual(name.placement.unit)
    expect(dose.placement.treated).toEqual(name.placement.treated)
    expect(dose.placement.x).toEqual(name.placement.x)
  })

  it.each([
    [
      'a property no zone has',
      { dose: 'tax' },
      /dose: no zone has "tax": nothing; name a property that exists: name, levy, same, gap and text/,
    ],
    [
      'a dose that is the same everywhere',
      { dose: 'same' },
      /dose: every zone has the same "same": 4; name a property/,
    ],
    ['doses missing', { dose: 'gap' }, /dose: "gap" is missing: in Mid 1 and East; give these zones a dose/],
    ['doses written as text', { dose: 'text' }, /dose: "text" is no number: "2" in West and Apart; write numbers/],
    [
      'a dose, and the land outside',
      { dose: 'levy', outside: 'untreated' as const },
      /outside: the land outside has no dose/,
    ],
  ])('refuse %s', (_, options, words) => {
    const features = levied.map((feature, i) =>
      withProperties(feature, { same: 4, gap: i % 2 ? null : 1, text: i % 4 ? i : '2' }),
    )
    expect(problemsOf(features, undefined, options)).toMatch(words)
  })

  it('refuse zones of different dose that do not touch, with the smallest gap between any two', () => {
    const apart = [0, 3, 7, 12].map((i) =>
      withProperties(zone(`Z${i}`, box(at, 1000 * i, 0, 1000 * i + 900, 900)), { levy: i }),
    )
    expect(problemsOf(apart, undefined, { dose: 'levy' })).toMatch(
      /zones whose dose differs share no border: the smallest gap is 210\d m/,
    )
  })

  it('throw without, and with both of, treated and dose', () => {
    expect(() => problemsOf(levied, undefined)).toThrow(RangeError)
    expect(() => problemsOf(levied, ['West'], { dose: 'levy' })).toThrow(RangeError)
  })

  it('are told apart by the digits of their ranks', () => {
    const doses = Float64Array.of(4, 0.5, 4, -3, 9, 2)
    const splits = splitsByDose(doses)
    expect(splits).toHaveLength(3)
    for (let i = 0; i < doses.length; i++)
      for (let j = 0; j < doses.length; j++)
        expect(splits.some((split) => split[i] !== split[j])).toBe(doses[i] !== doses[j])
  })
})
