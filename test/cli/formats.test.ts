/**
 * One study from every format: turnout of counties in 1980 (Pace & Barry 1997, spData) around three states where voters
 * could register on election day or needed no registration. Shapefiles, GeoPackages and KML are GDAL's (script beside them).
 */
import { copyFileSync, cpSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { join } from 'node:path'
import { unzipSync } from 'fflate'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import wkx from 'wkx'
import type { Jump, Results } from '../../src/results.js'
import { states } from '../borders/usStates.js'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const names = ['Minnesota', 'North Dakota', 'Wisconsin', 'Illinois', 'Iowa', 'Michigan', 'Montana', 'South Dakota']
const some = { ...states, features: states.features.filter(({ properties }) => names.includes(properties?.name)) }

const studyOf = (zones: string, records = 'file: counties.csv, position: [lon, lat]', name = 'name') => `
title: Turnout in 1980
records: {${records}, id: fips}
outcomes: [turnout]
line: {zones: ${zones}, zone_name: ${name}, treated: [Minnesota, North Dakota, Wisconsin], unit: km, piece: 150, reach: 300}
estimation: {bandwidth: 120}
checks: none
`

async function run(study: string, command = 'run') {
  writeFileSync(join(room, 'study.yaml'), study)
  return scarp([command, 'study.yaml', ...(command === 'run' ? ['--out', 'out', '--json'] : [])], { cwd: room })
}

async function results(study: string): Promise<Results> {
  const said = await run(study)
  expect(said).toMatchObject({ code: 0, stderr: '' })
  return JSON.parse(said.stdout)
}

const numbersOf = ({ lines, outcomes }: Results) => {
  const [outcome] = outcomes
  const pooled = outcome.pooled as Jump
  return {
    lengths: lines.map(({ length_m }) => length_m as number),
    units: pooled.units_in_bandwidth,
    estimates: [
      pooled.plain.estimate,
      pooled.corrected.estimate,
      pooled.corrected.standard_error,
      ...outcome.lines.flatMap((line) => ('corrected' in line ? [line.corrected.estimate] : [])),
    ],
  }
}

/** Within 1e-6 of the study from GeoJSON, relatively. */
function expectSame(found: Results, wanted: ReturnType<typeof numbersOf>): void {
  const numbers = numbersOf(found)
  expect(numbers.units).toEqual(wanted.units)
  expect(numbers.estimates).toHaveLength(wanted.estimates.length)
  numbers.estimates.forEach((value, i) => {
    expect(Math.abs(value / wanted.estimates[i] - 1)).toBeLessThan(1e-6)
  })
  numbers.lengths.forEach((value, i) => {
    expect(Math.abs(value / wanted.lengths[i] - 1)).toBeLessThan(1e-6)
  })
}

let wanted: ReturnType<typeof numbersOf>

beforeAll(async () => {
  cpSync('test/fixtures/layers', room, { recursive: true })
  copyFileSync('test/fixtures/turnout-1980/counties.csv', join(room, 'counties.csv'))
  writeFileSync(join(room, 'states.geojson'), JSON.stringify(some))
  const atlas = createRequire(import.meta.url).resolve('us-atlas/states-10m.json')
  copyFileSync(atlas, join(room, 'atlas.json'))
  for (const name of ['degrees', 'albers-metres', 'albers-feet']) {
    const files = unzipSync(readFileSync(join(room, `${name}.zip`)))
    for (const [file, bytes] of Object.entries(files)) writeFileSync(join(room, file.replace('states', name)), bytes)
  }
  const rows = some.features.map(
    ({ properties, geometry }) => `${properties?.name},"${wkx.Geometry.parseGeoJSON(geometry).toWkt()}"`,
  )
  writeFileSync(join(room, 'states.csv'), `name,shape\n${rows.join('\n')}\n`)
  wanted = numbersOf(await results(studyOf('states.geojson')))
})

describe('zones', () => {
  it.each([
    ['a shapefile in degrees', 'degrees.shp'],
    ['a zipped shapefile in metres', 'albers-metres.zip'],
    ['a shapefile in metres', 'albers-metres.shp'],
    ['a zipped shapefile in US feet', 'albers-feet.zip'],
    ['a GeoPackage in degrees', 'degrees.gpkg'],
    ['a GeoPackage in metres, its table named', '{file: albers.gpkg, layer: states}'],
    ['a table with WKT', '{file: states.csv, geometry: shape}'],
    ['a table with WKT, the column found', 'states.csv'],
  ])('from %s give the same estimates', async (_, zones) => {
    expectSame(await results(studyOf(zones)), wanted)
  })

  it('from KML give the same estimates', async () => {
    expectSame(await results(studyOf('states.kml', undefined, 'name')), wanted)
  })

  it('from TopoJSON, an object of the whole country, give the same estimates', async () => {
    const all = await results(studyOf('{file: atlas.json, layer: states}'))
    writeFileSync(join(room, 'all.geojson'), JSON.stringify(states))
    expectSame(all, numbersOf(await results(studyOf('all.geojson'))))
  })

  it('say what coordinate system they were read in', async () => {
    const { inputs } = await results(studyOf('albers-feet.zip'))
    const zones = inputs.find(({ file }) => file === 'albers-feet.zip')
    expect(zones).toMatchObject({ format: 'Shapefile', crs_from: 'states.prj', features: 8 })
    expect(zones?.crs).toContain('Albers')
    expect(zones?.edge_m).toBeGreaterThan(0)
  })

  it('without their .prj stop with a suspicion; the study may name the system', async () => {
    for (const [name, look] of [
      ['albers-metres', 'they look like metres (or feet) of a projected system'],
      ['albers-feet', 'they look like metres (or feet) of a projected system'],
    ]) {
      rmSync(join(room, `${name}.prj`))
      const said = await run(studyOf(`${name}.shp`))
      expect(said.code).toBe(2)
      expect(said.stderr).toContain(`${name}.shp: feature 0: the coordinate system is missing`)
      expect(said.stderr).toContain(look)
      expect(said.stderr).toContain('or write line.zones.crs: EPSG:...')
    }
    expectSame(await results(studyOf('{file: albers-metres.shp, crs: "EPSG:5070"}')), wanted)
    const apart = await run(studyOf('{file: albers.gpkg, crs: "EPSG:3857"}'))
    expect(apart.stderr).toContain('line.zones.crs: two coordinate systems')
  })
})

describe('suspicions', () => {
  const moved = (change: (at: number[]) => number[], only = (_: number) => true) => {
    const walk = (value: unknown): unknown =>
      typeof (value as number[])[0] === 'number' ? change(value as number[]) : (value as unknown[]).map(walk)
    const features = some.features.map((feature, i) =>
      only(i)
        ? {
            ...feature,
            geometry: {
              ...feature.geometry,
              coordinates: walk((feature.geometry as { coordinates?: unknown }).coordinates),
            },
          }
        : feature,
    )
    writeFileSync(join(room, 'moved.geojson'), JSON.stringify({ type: 'FeatureCollection', features }))
  }
  const mercator = ([lon, lat]: number[]) => [
    (lon * 20037508.34) / 180,
    (Math.log(Math.tan(((90 + lat) * Math.PI) / 360)) * 20037508.34) / Math.PI,
  ]

  it.each([
    ['Web Mercator without a label', mercator, undefined, 'they look like Web Mercator metres (EPSG:3857)'],
    ['axes swapped', ([lon, lat]: number[]) => [lat, lon], undefined, 'the axes are swapped'],
    ['two units in one file', mercator, (i: number) => i === 3, 'units are mixed'],
    ['feet of a large grid', ([lon, lat]: number[]) => [3e7 + lon * 1e5, lat * 1e5], undefined, 'they look like feet'],
  ])('%s', async (_, change, only, look) => {
    moved(change, only)
    const said = await run(studyOf('moved.geojson'))
    expect(said.code).toBe(2)
    expect(said.stderr).toContain(look)
  })

  it('numbers that are no degrees under a label that says so', async () => {
    moved(mercator)
    const file = join(room, 'moved.geojson')
    const crs = { type: 'name', properties: { name: 'urn:ogc:def:crs:OGC:1.3:CRS84' } }
    writeFileSync(file, JSON.stringify({ ...JSON.parse(readFileSync(file, 'utf8')), crs }))
    const said = await run(studyOf('moved.geojson'))
    expect(said.stderr).toContain('positions are no degrees')
    const right = { type: 'name', properties: { name: 'urn:ogc:def:crs:EPSG::3857' } }
    writeFileSync(file, JSON.stringify({ ...JSON.parse(readFileSync(file, 'utf8')), crs: right }))
    expectSame(await results(studyOf('moved.geojson')), wanted)
  })

  it('units that would meet the zones with their axes swapped', async () => {
    const said = await run(studyOf('states.geojson', 'file: counties.csv, position: [lat, lon]'))
    expect(said.code).toBe(2)
    expect(said.stderr).toContain('longitude and latitude swapped')
  })
})

describe('points', () => {
  const points = () => {
    const [head, ...rows] = readFileSync(join(room, 'counties.csv'), 'utf8').trim().split('\n')
    const at = head.split(',')
    return rows.map((row) => Object.fromEntries(row.split(',').map((cell, i) => [at[i], cell])))
  }

  it('from a column of WKT, in the units of another system', async () => {
    const text = points().map(({ fips, lon, lat, turnout }) => {
      const x = (Number(lon) * 20037508.342789244) / 180
      const y = (Math.log(Math.tan(((90 + Number(lat)) * Math.PI) / 360)) * 20037508.342789244) / Math.PI
      return `${fips},POINT (${x} ${y}),${turnout}`
    })
    writeFileSync(join(room, 'points.csv'), `fips,at,turnout\n${text.join('\n')}\n`)
    expectSame(await results(studyOf('states.geojson', 'file: points.csv, position: at, crs: "EPSG:3857"')), wanted)
  })

  it('from a TopoJSON file of points', async () => {
    const geometries = points().map(({ fips, lon, lat, turnout }) => ({
      type: 'Point',
      coordinates: [Number(lon), Number(lat)],
      properties: { fips, turnout: Number(turnout) },
    }))
    const counties = { type: 'GeometryCollection', geometries }
    writeFileSync(join(room, 'points.topojson'), JSON.stringify({ type: 'Topology', arcs: [], objects: { counties } }))
    expectSame(await results(studyOf('states.geojson', 'file: points.topojson')), wanted)
  })
})
