import { describe, expect, it } from 'vitest'
import { shareAlong } from '../../src/borders/barriers.js'
import { linesOfLayer, readLineLayer, shareNear } from '../../src/borders/index.js'
import { buildSegmentTree } from '../../src/borders/segmentTree.js'
import { problemText } from '../../src/problem.js'
import { borderOf, box, layerOf, metresAround, zone } from './makeZones.js'

const at = metresAround(-3, 52)

const features = [zone('T', box(at, 0, 0, 5000, 4000)), zone('U', box(at, 5000, 0, 9000, 4000))]

describe('barriers', () => {
  it('are near a known share of each piece', () => {
    // 60 m off the border beside all of piece 1 and 40% of piece 2, crossing piece 4
    const river = layerOf(
      'rivers.geojson',
      [at(5060, -500), at(5060, 1400), at(9000, 1400)],
      [at(0, 3500), at(9000, 3500)],
    )
    const border = borderOf(features, ['T'])
    const along = Math.sqrt(70 ** 2 - 60 ** 2)
    const wanted = [1, 0.4 + along / 1000, 0, 0.14]
    shareNear(border, river, 70).forEach((share, p) => {
      expect(Math.abs(share - wanted[p])).toBeLessThan(1e-4)
    })
    expect([...shareNear(border, river, 50)].map((share) => Number(share.toFixed(4)))).toEqual([0, 0, 0, 0.1])
    expect([...shareNear(border, { file: 'nothing.geojson', lines: [] }, 50)]).toEqual([0, 0, 0, 0])
    expect(() => shareNear(border, river, Number.NaN)).toThrow(RangeError)
  })

  it('are measured exactly: a river 60 m off half of a piece is within 100 m of 80 m more', () => {
    const border = borderOf(features, ['T'], { pieceMetres: 1e6 })
    const [[lon0, lat0], [lon1, lat1]] = [at(5060, -900), at(5060, 2000)]
    const edges = {
      lon0: Float64Array.of(lon0),
      lat0: Float64Array.of(lat0),
      lon1: Float64Array.of(lon1),
      lat1: Float64Array.of(lat1),
    }
    const share = shareAlong(border.pieces[0], edges, buildSegmentTree(edges), 100)
    expect(Math.abs(share * 4000 - 2080)).toBeLessThan(0.2)
  })

  it('may be the boundaries of polygons, and may cross the antimeridian', () => {
    const lake = {
      type: 'FeatureCollection',
      features: [
        {
          type: 'Feature',
          properties: {},
          geometry: { type: 'Polygon', coordinates: [box(at, 0, 0, 9, 9), box(at, 1, 1, 2, 2)] },
        },
        {
          type: 'Feature',
          properties: {},
          geometry: {
            type: 'MultiLineString',
            coordinates: [
              [
                [179, 0],
                [-179, 1],
              ],
              [
                [0, 0],
                [1, 1],
              ],
            ],
          },
        },
      ],
    }
    const read = readLineLayer(lake, 'lake.geojson')
    expect(read.ok && linesOfLayer(read.value)).toEqual([
      box(at, 0, 0, 9, 9),
      box(at, 1, 1, 2, 2),
      [
        [179, 0],
        [181, 1],
      ],
      [
        [0, 0],
        [1, 1],
      ],
    ])
  })

  it.each([
    [
      'no collection',
      {
        type: 'LineString',
        coordinates: [
          [0, 0],
          [1, 1],
        ],
      },
      'not a GeoJSON FeatureCollection: type "LineString"',
    ],
    [
      'points',
      { type: 'Point', coordinates: [0, 0] },
      'feature 0: geometry must be a LineString, MultiLineString, Polygon or MultiPolygon: "Point"',
    ],
    ['one position', { type: 'LineString', coordinates: [[0, 0]] }, 'feature 0: line needs at least 2 positions: 1'],
    [
      'a hole in the list',
      {
        type: 'MultiLineString',
        coordinates: [
          [
            [0, 0],
            [1, null],
          ],
        ],
      },
      'feature 0: line 0, position 1 is not a pair of finite numbers: [1,null]',
    ],
    [
      'metres',
      {
        type: 'LineString',
        coordinates: [
          [250000, 6_000_000],
          [250100, 6_000_000],
        ],
      },
      'feature 0: positions are not degrees; they look like Web Mercator metres',
    ],
    [
      'nothing',
      { type: 'MultiLineString', coordinates: [] },
      'feature 0: line: coordinates must be a list of lines: []',
    ],
  ])('are refused with their place: %s', (name, geometry, words) => {
    const content =
      name === 'no collection'
        ? geometry
        : { type: 'FeatureCollection', features: [{ type: 'Feature', properties: {}, geometry }] }
    const read = readLineLayer(content, 'rivers.geojson')
    expect(read.ok ? '' : problemText(read.problems[0])).toContain(`rivers.geojson: ${words}`)
  })
})
