/**
 * Real input through the command line. Turnout: 1980 county centres (Pace & Barry 1997, spData) against the states of
 * us-atlas, treated where voters could register on election day or needed no registration. Athens: flats against
 * municipal districts (spData). Sources in test/fixtures/SOURCES.md.
 * The pooled estimate is recomputed from units.csv by dense least squares with one dummy per piece (ml-matrix QR).
 */
import { copyFileSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { Matrix, QrDecomposition } from 'ml-matrix'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Jump, Results } from '../../src/results.js'
import { states } from '../borders/usStates.js'
import { newRoom, scarp } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

const turnoutStudy = `
title: Turnout in 1980 where voters could register on election day
records: {file: counties.csv, id: fips, position: [lon, lat]}
outcomes: [turnout]
line:
  zones: states.geojson
  treated: [Maine, Minnesota, North Dakota, Oregon, Wisconsin]
  unit: km
  piece: 150
  reach: 400
estimation: {bandwidth: 150}
checks: none
`

const athensStudy = `
title: Flats in seven districts of Athens
records: {file: flats.csv, id: id, position: [lon, lat]}
outcomes: [price_per_sqm, size]
line: {zones: districts.geojson, zone_name: district, treated: ['5', '7'], unit: m, piece: 1500, snap: 15}
estimation: {bandwidth: 900}
checks: none
`

interface UnitRow {
  readonly id: string
  readonly line: string
  readonly side: string
  readonly x: number
  readonly zone: string
}

function unitsOf(folder: string): UnitRow[] {
  const [header, ...rows] = readFileSync(join(room, folder, 'units.csv'), 'utf8')
    .trim()
    .split('\n')
  expect(header).toBe('id,line,side,x,zone,piece,foot_lon,foot_lat,position_m')
  return rows.map((row) => {
    const cells = [...row.matchAll(/"((?:[^"]|"")*)"|([^,]+)|(?<=,|^)(?=,|$)/g)].map(([all, quoted]) => quoted ?? all)
    return { id: cells[0], line: cells[1], side: cells[2], x: Number(cells[3]), zone: cells[4] }
  })
}

/** Local linear, triangular, with piece dummies: [jump] by QR on sqrt-weighted rows. */
function denseJump(units: readonly UnitRow[], outcome: (id: string) => number, h: number): number {
  const used = units.filter(({ x }) => Math.abs(x) < h)
  const pieces = [...new Set(used.map(({ line }) => line))]
  const rows = used.map(({ x, side, line, id }) => {
    const root = Math.sqrt(1 - Math.abs(x) / h)
    const treated = side === 'treated' ? 1 : 0
    const row = [treated, (treated * x) / h, ((1 - treated) * x) / h, ...pieces.map((piece) => Number(piece === line))]
    return { row: row.map((value) => value * root), y: outcome(id) * root }
  })
  const solution = new QrDecomposition(new Matrix(rows.map(({ row }) => row))).solve(
    Matrix.columnVector(rows.map(({ y }) => y)),
  )
  return solution.get(0, 0)
}

async function run(name: string): Promise<Results> {
  const said = await scarp(['run', `${name}.yaml`, '--out', name, '--quiet'], { cwd: room })
  expect(said).toEqual({ code: 0, stdout: '', stderr: '' })
  return JSON.parse(readFileSync(join(room, name, 'results.json'), 'utf8'))
}

describe('turnout in 1980', () => {
  let results: Results
  const turnout = new Map<string, number>()
  beforeAll(async () => {
    copyFileSync('test/fixtures/turnout-1980/counties.csv', join(room, 'counties.csv'))
    writeFileSync(join(room, 'states.geojson'), JSON.stringify(states))
    writeFileSync(join(room, 'turnout.yaml'), turnoutStudy)
    results = await run('turnout')
    for (const row of readFileSync(join(room, 'counties.csv'), 'utf8').trim().split('\n').slice(1)) {
      const cells = row.split(',')
      turnout.set(cells[0], Number(cells[3]))
    }
  })
  it('reads 3,107 counties and places those within 400 km', () => {
    expect(results.placement.read).toBe(3107)
    const asides = Object.values(results.placement.set_aside).reduce((a, b) => a + b, 0)
    expect(results.placement.placed + asides).toBe(3107)
    expect(new Set(results.lines.map(({ zones }) => String(zones))).size).toBe(12)
  })
  it('puts every placed county on the side of its own state', () => {
    const treated = ['Maine', 'Minnesota', 'North Dakota', 'Oregon', 'Wisconsin']
    for (const { zone, side, x } of unitsOf('turnout')) {
      expect([zone, side]).toEqual([zone, treated.includes(zone) ? 'treated' : 'untreated'])
      expect(x > 0).toBe(side === 'treated')
    }
  })
  it('pools to what dense least squares gives: turnout about five points higher', () => {
    const pooled = results.outcomes[0].pooled as Jump
    const dense = denseJump(unitsOf('turnout'), (id) => turnout.get(id) as number, 150)
    expect(Math.abs(pooled.plain.estimate / dense - 1)).toBeLessThan(1e-9)
    expect(pooled.plain.estimate).toBeGreaterThan(0.02)
    expect(pooled.plain.estimate).toBeLessThan(0.08)
  })
})

describe('flats in Athens', () => {
  let results: Results
  beforeAll(async () => {
    copyFileSync('test/fixtures/athens-flats/flats.csv', join(room, 'flats.csv'))
    copyFileSync('test/fixtures/athens-flats/districts.geojson', join(room, 'districts.geojson'))
    writeFileSync(join(room, 'athens.yaml'), athensStudy)
    results = await run('athens')
  })
  it('places the thousand flats, the map agreeing with the district on record', () => {
    const district = new Map(
      readFileSync(join(room, 'flats.csv'), 'utf8')
        .trim()
        .split('\r\n')
        .slice(1)
        .map((row) => [row.split(',')[0], row.split(',')[8]]),
    )
    const units = unitsOf('athens')
    const agreeing = units.filter(({ id, zone }) => district.get(id) === zone).length
    expect(results.placement.read).toBe(1000)
    expect(units.length).toBe(1000)
    expect(agreeing).toBe(units.length)
  })
  it('estimates the pooled jump of both outcomes', () => {
    for (const { pooled } of results.outcomes) expect((pooled as Jump).plain.standard_error).toBeGreaterThan(0)
  })
})
