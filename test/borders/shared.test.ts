import { describe, expect, it } from 'vitest'
import { edgeLengthMetres, prepareBorder, readZones } from '../../src/borders/index.js'
import {
  borderOf,
  box,
  closed,
  lengths,
  metresAround,
  multiZone,
  type Point,
  problemsOf,
  seeded,
  type ZoneFeature,
  zone,
  zonesOf,
} from './makeZones.js'
import { sharedArcs, states } from './usStates.js'

const at = metresAround(5, 47)
const left = zone('T', box(at, 0, 0, 10_000, 10_000))

/** Length of lon/lat polylines. */
function total(lines: readonly (readonly (readonly number[])[])[]): number {
  let sum = 0
  for (const line of lines) {
    for (let i = 0; i + 1 < line.length; i++)
      sum += edgeLengthMetres(line[i][0], line[i][1], line[i + 1][0], line[i + 1][1])
  }
  return sum
}

function within1Percent(found: number, wanted: number): void {
  expect(Math.abs(found / wanted - 1)).toBeLessThan(0.01)
}

describe('shared borders of two zones', () => {
  it('is exactly the shared edge where vertices are identical, whatever the tolerance', () => {
    for (const snapMetres of [0, 2, 50, 400]) {
      const border = borderOf([left, zone('U', box(at, 10_000, 0, 20_000, 10_000))], ['T'], { snapMetres })
      expect(border.pieces.map((piece) => piece.label)).toEqual(
        Array.from({ length: 10 }, (_, i) => `U | T, piece ${i + 1}`),
      )
      const ends = [border.pieces[0].coordinates[0], border.pieces[9].coordinates.at(-1)]
      expect(ends).toEqual([at(10_000, 0), at(10_000, 10_000)])
      expect(border.pieces.flatMap((piece) => piece.coordinates).every(([lon]) => lon === at(10_000, 0)[0])).toBe(true)
    }
  })

  it('is exactly the shared edge where one zone has vertices the other has not', () => {
    const [west, east] = [8, 8.25]
    const other = zone(
      'U',
      closed([
        [east, 45],
        [8.5, 45],
        [8.5, 45.25],
        [east, 45.25],
        [east, 45.125],
        [east, 45.0625],
      ]),
    )
    const own = zone(
      'T',
      closed([
        [west, 45],
        [east, 45],
        [east, 45.25],
        [west, 45.25],
      ]),
    )
    for (const treated of ['T', 'U']) {
      const border = borderOf([own, other], [treated], { snapMetres: 50, pieceMetres: 1e9 })
      expect(border.pieces).toHaveLength(1)
      expect(border.pieces[0].lengthMetres).toBeCloseTo(edgeLengthMetres(east, 45, east, 45.25), 6)
    }
  })

  it('follows a boundary digitised twice with a metre of jitter', () => {
    const random = seeded(3)
    const wiggle = (y: number) => 300 * Math.sin(y / 700)
    const drawn = (step: number) =>
      Array.from({ length: Math.round(10_000 / step) + 1 }, (_, i): Point => {
        const isEnd = i === 0 || i * step >= 10_000
        const y = isEnd ? Math.min(10_000, i * step) : i * step + 2 * random() - 1
        return at(10_000 + wiggle(y) + 2 * random() - 1, y)
      })
    const own = zone('T', closed([at(0, 0), ...drawn(80), at(0, 10_000)]))
    const other = zone('U', closed([at(20_000, 10_000), ...drawn(50).reverse(), at(20_000, 0)]))
    const smooth = Array.from({ length: 1001 }, (_, i) => at(10_000 + wiggle(i * 10), i * 10))
    const border = borderOf([own, other], ['T'], { snapMetres: 5, pieceMetres: 1e6 })
    expect(border.pieces).toHaveLength(1)
    within1Percent(border.pieces[0].lengthMetres, total([smooth]))
  })

  it('bridges a gap of 40 m at snap 50, and says how wide the gap is at snap 20', () => {
    const features = [left, zone('U', box(at, 10_040, 0, 20_000, 10_000))]
    within1Percent(lengths(borderOf(features, ['T'], { snapMetres: 50 }))['U | T'], 10_000)
    expect(problemsOf(features, ['T'], { snapMetres: 20 })).toMatch(
      /^zones\.geojson: treated and untreated zones share no border: the smallest gap is (40|41) m, near \(.*\); .*set snap above/,
    )
  })

  it('bridges an overlap of 15 m at snap 20, and refuses it at snap 5 with its place and width', () => {
    const features = [left, zone('U', box(at, 9_985, 0, 20_000, 10_000))]
    within1Percent(lengths(borderOf(features, ['T'], { snapMetres: 20 }))['U | T'], 10_000)
    expect(problemsOf(features, ['T'], { snapMetres: 5 })).toMatch(
      /zones T and U overlap by more than snap \(5 m\): at least 15 m wide near/,
    )
  })

  it('takes the border of an island in a hole as one closed line', () => {
    const lake = box(at, 3000, 3000, 7000, 7000)
    const sea = zone('T', box(at, 0, 0, 10_000, 10_000), lake)
    for (const treated of ['T', 'U']) {
      const border = borderOf([sea, zone('U', [...lake].reverse())], [treated], { pieceMetres: 1e6, snapMetres: 20 })
      expect(border.pieces).toHaveLength(1)
      expect(border.pieces[0].coordinates[0]).toEqual(border.pieces[0].coordinates.at(-1))
      within1Percent(border.pieces[0].lengthMetres, 16_000)
    }
  })

  it('counts the borders of every part of a zone, and no coast, outer or hole edge', () => {
    const exclave = box(at, 14_000, 4000, 16_000, 6000)
    const treated = multiZone('T', [box(at, 0, 0, 10_000, 10_000), box(at, 100, 100, 200, 200)], [exclave])
    const other = zone('U', box(at, 10_000, 0, 20_000, 10_000), exclave)
    const border = borderOf([treated, other], ['T'], { pieceMetres: 1e6 })
    expect(border.pieces.map((piece) => Math.round(piece.lengthMetres / 100))).toEqual([100, 80])
  })

  it('is not there where two zones meet at a corner only', () => {
    const features = [left, zone('U', box(at, 10_000, 10_000, 20_000, 20_000))]
    for (const snapMetres of [0, 30]) {
      expect(problemsOf(features, ['T'], { snapMetres })).toMatch(/share no border: they meet only at a corner, near/)
    }
  })

  it('goes to the nearer of two zones, cut where both are equally near', () => {
    const below = zone('A', box(at, 10_010, 0, 20_000, 6000))
    const above = zone('B', box(at, 10_010, 6020, 20_000, 10_000))
    const found = lengths(borderOf([left, below, above], ['T'], { snapMetres: 40 }))
    expect(Math.abs(found['A | T'] - 6010)).toBeLessThan(1)
    expect(Math.abs(found['B | T'] - 3990)).toBeLessThan(1)
  })

  it('leaves no whiskers at a junction where a third zone begins', () => {
    // the boundary of T turns by 20 degrees away from U, with a third zone (treated too) in the wedge
    const wedge = (x: number) => Math.tan((20 * Math.PI) / 180) * x
    const own = zone('T', closed([at(0, 0), at(5000, 0), at(10_000, -wedge(5000)), at(0, -5000)]))
    const third = zone('V', closed([at(5000, 0), at(10_000, 0), at(10_000, -wedge(5000))]))
    const other = zone('U', box(at, 0, 0, 10_000, 5000))
    const border = borderOf([own, third, other], ['T', 'V'], { snapMetres: 60, pieceMetres: 1e6 })
    const found = lengths(border)
    expect(Math.abs(found['U | T'] - 5000)).toBeLessThan(0.5)
    expect(Math.abs(found['U | V'] - 5000)).toBeLessThan(0.5)
  })
})

describe('a town of 16 wards with rough boundaries', () => {
  /** Sides of 2 km in 100 steps, each wobbling by 2 m; every ward draws them anew with `jitter` metres of error. */
  function wards(jitter: number): ZoneFeature[] {
    const random = seeded(11)
    const sides = new Map<string, Point[]>()
    const side = (from: Point, to: Point): Point[] => {
      const isForward = from[0] + from[1] < to[0] + to[1]
      const [a, b] = isForward ? [from, to] : [to, from]
      const key = `${a} ${b}`
      const wobble = (k: number) => (k % 100 === 0 ? 0 : 4 * random() - 2)
      const drawn =
        sides.get(key) ??
        Array.from({ length: 101 }, (_, k): Point => {
          const share = k / 100
          return [a[0] + share * (b[0] - a[0]) + wobble(k), a[1] + share * (b[1] - a[1]) + wobble(k)]
        })
      sides.set(key, drawn)
      return isForward ? drawn : [...drawn].reverse()
    }
    const errors = seeded(12)
    const error = () => jitter * (2 * errors() - 1)
    return Array.from({ length: 16 }, (_, w) => {
      const [x, y] = [2000 * (w % 4), 2000 * Math.floor(w / 4)]
      const corners: Point[] = [
        [x, y],
        [x + 2000, y],
        [x + 2000, y + 2000],
        [x, y + 2000],
      ]
      const ring = corners.flatMap((corner, k) => side(corner, corners[(k + 1) % 4]).slice(0, -1))
      return zone(`w${w}`, closed(ring.map(([east, north]) => at(east + error(), north + error()))))
    })
  }
  const treated = ['w0', 'w1', 'w6', 'w11', 'w15']

  it('has the same border to the bit at every tolerance where vertices are identical', () => {
    const [close, wide] = [0, 50].map((snapMetres) => borderOf(wards(0), treated, { snapMetres }))
    expect(wide.pieces).toEqual(close.pieces)
  })

  it('has nearly the same border where every ward was drawn apart', () => {
    const clean = lengths(borderOf(wards(0), treated, { snapMetres: 2 }))
    for (const snapMetres of [6, 50]) {
      const found = lengths(borderOf(wards(1), treated, { snapMetres }))
      expect(Object.keys(found)).toEqual(Object.keys(clean))
      for (const [pair, metres] of Object.entries(clean)) within1Percent(found[pair], metres)
    }
  })
})

describe('across the antimeridian', () => {
  it('joins zones on both sides, and shares nothing along a zone’s own cut', () => {
    const west = zone(
      'T',
      closed([
        [170, 0],
        [180, 0],
        [180, 5],
        [170, 5],
      ]),
    )
    const east = zone(
      'U',
      closed([
        [-180, 0],
        [-170, 0],
        [-170, 5],
        [-180, 5],
      ]),
    )
    const across = borderOf([west, east], ['T'], { pieceMetres: 1e7 })
    expect(across.pieces).toHaveLength(1)
    expect(across.pieces[0].lengthMetres).toBeCloseTo(edgeLengthMetres(180, 0, 180, 5), 6)

    const split = multiZone(
      'T',
      [
        closed([
          [178, 0],
          [180, 0],
          [180, 5],
          [178, 5],
        ]),
      ],
      [
        closed([
          [-180, 0],
          [-178, 0],
          [-178, 5],
          [-180, 5],
        ]),
      ],
    )
    const north = multiZone(
      'U',
      [
        closed([
          [178, 5],
          [180, 5],
          [180, 8],
          [178, 8],
        ]),
      ],
      [
        closed([
          [-180, 5],
          [-178, 5],
          [-178, 8],
          [-180, 8],
        ]),
      ],
    )
    const cut = borderOf([split, north], ['T'], { pieceMetres: 1e7, snapMetres: 50 })
    expect(cut.pieces).toHaveLength(1)
    expect(cut.pieces[0].coordinates.map(([lon]) => lon)).toEqual([178, 180, 182])
  })

  it('reads a ring that jumps across, or runs past 180, as the same zone', () => {
    const jumping = zone(
      'T',
      closed([
        [178, 0],
        [-178, 0],
        [-178, 5],
        [178, 5],
      ]),
    )
    const running = zone(
      'T',
      closed([
        [178, 0],
        [182, 0],
        [182, 5],
        [178, 5],
      ]),
    )
    const other = zone(
      'U',
      closed([
        [-178, 0],
        [-175, 0],
        [-175, 5],
        [-178, 5],
      ]),
    )
    const [a, b] = [jumping, running].map((own) => borderOf([own, other], ['T'], { pieceMetres: 1e7 }).pieces)
    expect(a).toEqual(b)
    expect(a[0].lengthMetres).toBeCloseTo(edgeLengthMetres(182, 0, 182, 5), 6)
  })
})

describe('order and direction', () => {
  const turned = (ring: Point[], by: number): Point[] => {
    const open = ring.slice(0, -1)
    return closed([...open.slice(by % open.length), ...open.slice(0, by % open.length)])
  }
  const disturbed = (features: ZoneFeature[]): ZoneFeature[] =>
    [...features].reverse().map((feature) => {
      const { geometry } = feature
      const rings = (polygon: number[][][]) => polygon.map((ring) => turned([...(ring as Point[])].reverse(), 3))
      return geometry.type === 'Polygon'
        ? { ...feature, geometry: { ...geometry, coordinates: rings(geometry.coordinates) } }
        : { ...feature, geometry: { ...geometry, coordinates: geometry.coordinates.map(rings).reverse() } }
    })

  it('change not one byte of the pieces', () => {
    const treated = ['Maine', 'Minnesota', 'North Dakota', 'Oregon', 'Wisconsin']
    const features = states.features as ZoneFeature[]
    const options = { snapMetres: 20, pieceMetres: 40_000 }
    const given = borderOf(features, treated, options)
    const other = borderOf(disturbed(features), treated, options)
    expect(JSON.stringify(other.pieces)).toBe(JSON.stringify(given.pieces))
    expect(other.edges).toEqual(given.edges)
  })

  it('change not one byte where zones do not fit together', () => {
    const random = seeded(8)
    const rough = (x: number, from: number, to: number) => {
      const count = Math.round((to - from) / 100)
      return Array.from({ length: count + 1 }, (_, i) =>
        at(x + 4 * random(), from + (i * (to - from)) / count + 30 * random()),
      )
    }
    const features = [
      zone('T', closed([at(0, 0), ...rough(10_000, 0, 10_000), at(0, 10_200)])),
      zone('A', closed([...rough(10_006, 0, 5000), at(20_000, 5000), at(20_000, 0)])),
      zone('B', closed([...rough(10_006, 5037, 10_000), at(20_000, 10_000), at(20_000, 5037)])),
    ]
    const options = { snapMetres: 45 }
    const given = borderOf(features, ['T'], options)
    expect(given.pieces.length).toBeGreaterThan(5)
    // the border goes over from A to B inside an edge of T, where both are equally near
    const ends = ['A', 'B'].map((name) => {
      const own = given.pieces.filter((piece) => piece.zones[0] === name)
      return [own[0].coordinates[0], own.at(-1)?.coordinates.at(-1)].map(String)
    })
    expect(ends[0].filter((end) => ends[1].includes(end))).toHaveLength(1)
    expect(JSON.stringify(borderOf(disturbed(features), ['T'], options).pieces)).toBe(JSON.stringify(given.pieces))
  })

  it('and a turn of the globe change no length', () => {
    const turnedBy = (degrees: number) => {
      const shifted = metresAround(5 + degrees, 47)
      return lengths(
        borderOf([zone('T', box(shifted, 0, 0, 9000, 9000)), zone('U', box(shifted, 9030, 0, 15_000, 9000))], ['T'], {
          snapMetres: 50,
        }),
      )
    }
    const [here, there] = [turnedBy(0)['U | T'], turnedBy(174.95)['U | T']]
    expect(Math.abs(there - here)).toBeLessThan(1e-4)
  })
})

describe('United States', () => {
  const read = readZones(states, 'states.geojson', 'name')
  it.each([
    ['Tennessee', 'Kentucky'],
    ['Illinois', 'Missouri'],
    ['Louisiana', 'Mississippi'],
  ])('%s | %s is as long as the shared arcs', (untreated, treated) => {
    if (!read.ok) throw new Error('states must be readable')
    const border = prepareBorder(read.value, { treated: [treated], snapMetres: 10, pieceMetres: 50_000 })
    if (!border.ok) throw new Error(border.problems[0].what)
    const wanted = total(sharedArcs(untreated, treated).coordinates)
    expect(Math.abs(lengths(border.value)[`${untreated} | ${treated}`] - wanted)).toBeLessThan(0.001)
  })
})

describe('treated zones', () => {
  const pair = [left, zone('Upper Town', box(at, 10_000, 0, 20_000, 10_000))]
  it('that do not exist are refused with the nearest name', () => {
    expect(problemsOf(pair, ['Uper town'])).toBe(
      'zones.geojson: treated: no zone has this name: "Uper town"; did you mean "Upper Town"?',
    )
  })
  it('can be marked by a property', () => {
    const zones = zonesOf(...pair)
    const marked = { ...zones, properties: [{ levy: 'new' }, { levy: 'old' }] }
    const options = { snapMetres: 1, pieceMetres: 1e6 }
    const border = prepareBorder(marked, { ...options, treated: { property: 'levy', equals: 'new' } })
    expect(border.ok && [...border.value.treatedZone]).toEqual([1, 0])
    const wrong = prepareBorder(marked, { ...options, treated: { property: 'levy', equals: 'nwe' } })
    expect(!wrong.ok && wrong.problems[0].todo).toBe('name a value that exists: "new" and "old"')
    const none = prepareBorder(marked, { ...options, treated: { property: 'tax', equals: 'new' } })
    expect(!none.ok && none.problems[0].todo).toBe('name one that exists: levy')
  })
  it('must leave some untreated, and be some', () => {
    expect(problemsOf(pair, ['T', 'Upper Town'])).toMatch(/every zone is treated/)
    expect(problemsOf(pair, [])).toMatch(/no zone is treated/)
  })
  it('are all zones that overlap, and zones inside others, refused', () => {
    expect(problemsOf([left, zone('U', box(at, 4000, 4000, 6000, 6000))], ['T'])).toMatch(
      /zones T and U overlap .* m wide/,
    )
    expect(problemsOf([left, zone('U', box(at, 0, 0, 10_000, 10_000))], ['T'])).toMatch(/zones T and U overlap/)
    const cross = zone('U', box(at, 4000, -5000, 6000, 15_000))
    expect(problemsOf([left, cross], ['T'])).toMatch(/zones T and U overlap/)
  })
  it('and impossible options are the caller’s fault', () => {
    expect(() => problemsOf(pair, ['T'], { snapMetres: -1 })).toThrow(RangeError)
    expect(() => problemsOf(pair, ['T'], { pieceMetres: Number.NaN })).toThrow(RangeError)
  })
})
