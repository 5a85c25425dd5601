import { describe, expect, it } from 'vitest'
import { joinPaths } from '../../src/borders/chains.js'
import { edgeLengthMetres } from '../../src/borders/index.js'
import { factsOfPiece } from '../../src/borders/pieceFacts.js'
import { cutIntoPieces } from '../../src/borders/pieces.js'
import { borderOf, closed, metresAround, type Point, zone } from './makeZones.js'

const pair = ['U', 'T'] as const

function lengthOf(points: readonly (readonly [number, number])[]): number {
  return points.slice(1).reduce((sum, [lon, lat], i) => sum + edgeLengthMetres(points[i][0], points[i][1], lon, lat), 0)
}

describe('pieces', () => {
  const long: Point[] = [
    [-123.3, 49],
    [-95.15, 49],
  ]
  const slanting: Point[] = [
    [0, 60],
    [40, 20],
  ]

  it.each([
    ['along the 49th parallel', long],
    ['on one slanting edge of 5,000 km', slanting],
    ['on many edges', Array.from({ length: 300 }, (_, i): Point => [i / 100, 50 + Math.sin(i / 7) / 50])],
  ])('are equal, %s', (_, points) => {
    const total = lengthOf(points)
    const pieces = cutIntoPieces([{ points }], pair, total / 7.4)
    expect(pieces).toHaveLength(7)
    for (const [i, piece] of pieces.entries()) {
      expect(Math.abs(lengthOf(piece.coordinates) - total / 7)).toBeLessThan(0.01)
      expect(piece.lengthMetres).toBeCloseTo(total / 7, 6)
      expect(piece.startMetres).toBeCloseTo((i * total) / 7, 5)
      expect(piece.label).toBe(`U | T, piece ${i + 1}`)
      if (i > 0) expect(piece.coordinates[0]).toEqual(pieces[i - 1].coordinates.at(-1))
    }
    expect(pieces[0].coordinates[0]).toEqual(points[0])
    expect(pieces[6].coordinates.at(-1)).toEqual(points.at(-1))
    const vertices = pieces.flatMap((piece) => piece.coordinates.slice(1, -1))
    expect(vertices.every((vertex) => points.some((p) => p[0] === vertex[0] && p[1] === vertex[1]))).toBe(true)
  })

  it('never span a gap, and a short chain is a piece of its own', () => {
    const chains: { points: Point[] }[] = [
      {
        points: [
          [0, 0],
          [0.1, 0],
        ],
      },
      {
        points: [
          [1, 0],
          [1.001, 0],
        ],
      },
    ]
    const pieces = cutIntoPieces(chains, pair, 5566)
    expect(pieces.map((piece) => piece.piece)).toEqual([1, 2, 3])
    expect(pieces[2].coordinates).toEqual([
      [1, 0],
      [1.001, 0],
    ])
    expect(pieces[2].startMetres).toBeCloseTo(lengthOf(chains[0].points), 6)
  })

  it('are cut at a vertex that lies at the cut', () => {
    const pieces = cutIntoPieces(
      [
        {
          points: [
            [0, 0],
            [0.1, 0],
            [0.2, 0],
          ],
        },
      ],
      pair,
      11_132,
    )
    expect(pieces.map((piece) => piece.coordinates)).toEqual([
      [
        [0, 0],
        [0.1, 0],
      ],
      [
        [0.1, 0],
        [0.2, 0],
      ],
    ])
  })

  it('follow one line through the parts of a zone that was merged without dissolving', () => {
    const own = {
      ...zone('T'),
      geometry: {
        type: 'MultiPolygon' as const,
        coordinates: [0, 1, 2].map((i) => [
          closed([
            [0, i],
            [1, i],
            [1, i + 1],
            [0, i + 1],
          ]),
        ]),
      },
    }
    const other = zone(
      'U',
      closed([
        [1, 0],
        [2, 0],
        [2, 3],
        [1, 3],
      ]),
    )
    const border = borderOf([own, other], ['T'], { pieceMetres: 1e7, snapMetres: 100 })
    expect(border.pieces.map((piece) => piece.coordinates)).toEqual([
      [
        [1, 0],
        [1, 1],
        [1, 2],
        [1, 3],
      ],
    ])
  })
})

describe('chains', () => {
  it('join at ends in one direction, whatever the order and direction of the paths', () => {
    const paths: Point[][] = [
      [
        [2, 0],
        [1, 0],
      ],
      [
        [0, 0],
        [1, 0],
      ],
      [
        [2, 0],
        [3, 1],
      ],
    ]
    const wanted = [
      {
        points: [
          [0, 0],
          [1, 0],
          [2, 0],
          [3, 1],
        ],
      },
    ]
    expect(joinPaths(paths)).toEqual(wanted)
    expect(joinPaths(paths.map((path) => [...path].reverse()).reverse())).toEqual(wanted)
  })
  it('stop where three meet', () => {
    expect(
      joinPaths([
        [
          [0, 0],
          [1, 0],
        ],
        [
          [1, 0],
          [2, 0],
        ],
        [
          [1, 0],
          [1, 1],
        ],
      ]),
    ).toHaveLength(3)
  })
  it('close where the last path meets the first, and go on across the antimeridian', () => {
    const [loop] = joinPaths([
      [
        [0, 0],
        [1, 0],
        [1, 1],
      ],
      [
        [1, 1],
        [0, 1],
        [0, 0],
      ],
    ])
    expect(loop.points).toEqual([
      [0, 0],
      [0, 1],
      [1, 1],
      [1, 0],
      [0, 0],
    ])
    const [across] = joinPaths([
      [
        [178, 1],
        [180, 1],
      ],
      [
        [-180, 1],
        [-179, 1],
      ],
    ])
    expect(across.points).toEqual([
      [178, 1],
      [180, 1],
      [181, 1],
    ])
  })
})

describe('how straight a piece is', () => {
  const at = metresAround(3, 48)
  const circle = (degrees: number) =>
    Array.from({ length: 181 }, (_, i) => {
      const angle = (((i / 180) * degrees - 90) * Math.PI) / 180
      return at(1000 * Math.cos(angle), 1000 * Math.sin(angle))
    })
  /** 0.5 m to and fro every 2 m: the jagged edge of a raster. */
  const jagged = Array.from({ length: 501 }, (_, i) => at(2 * i, i % 2 ? 0.5 : 0))

  it.each([
    ['a straight line', [at(0, 0), at(400, 300), at(800, 600)], 1, 0],
    ['a right angle', [at(0, 0), at(600, 0), at(600, 400)], Math.sqrt(0.52), 90],
    ['a right angle near the end', [at(0, 0), at(850, 0), at(850, 150)], Math.hypot(850, 150) / 1000, 90],
    ['there and back again', [at(0, 0), at(500, 0), at(500, 20), at(0, 20)], 20 / 1020, 180],
    // stretches at both ends turn by nine tenths of the arc
    ['half a circle', circle(180), 2 / Math.PI, 162],
    ['a quarter of a circle', circle(90), Math.sqrt(2) / (Math.PI / 2), 81],
    ['a jagged line', jagged, 1000 / (500 * Math.hypot(2, 0.5)), 0],
    ['an S of two quarter turns', [at(0, 0), at(400, 0), at(400, 300), at(800, 300)], Math.hypot(800, 300) / 1100, 90],
    ['a bump undone within a tenth', [at(0, 0), at(480, 0), at(500, 10), at(520, 0), at(1000, 0)], 1000 / 1004.72, 0],
  ])('%s', (_, points, straightness, turn) => {
    const facts = factsOfPiece(points, 2)
    expect(Math.abs(facts.straightness - straightness)).toBeLessThan(2e-4)
    expect(Math.abs(facts.largestTurnDegrees - turn)).toBeLessThan(turn === 0 ? 12 : 1.5)
  })

  it('knows no direction of reading, and no turn of the map', () => {
    const points = [at(0, 0), at(500, 20), at(700, 400), at(650, 900)]
    const turned = points.map((_, i) => {
      const [x, y] = [
        [0, 0],
        [500, 20],
        [700, 400],
        [650, 900],
      ][i]
      return at(x * 0.6 - y * 0.8, x * 0.8 + y * 0.6)
    })
    const given = factsOfPiece(points, 2)
    for (const other of [[...points].reverse(), turned]) {
      const facts = factsOfPiece(other, 2)
      expect(facts.straightness).toBeCloseTo(given.straightness, 3)
      expect(Math.abs(facts.largestTurnDegrees - given.largestTurnDegrees)).toBeLessThan(0.05)
    }
  })

  it('takes stretches of two tolerances on short pieces, at most half of them', () => {
    // 40 m with 4 m steps of 1 m: a drawing error at a tolerance of 5 m
    const steps = Array.from({ length: 21 }, (_, i) => at(2 * i, Math.floor(i / 2) % 2))
    expect(factsOfPiece(steps, 0).largestTurnDegrees).toBeGreaterThan(15)
    expect(factsOfPiece(steps, 100).largestTurnDegrees).toBeLessThan(10)
  })
})
