import { describe, expect, it } from 'vitest'
import { resultsJson } from '../../src/cli/resultsJson.js'
import { unitsCsv } from '../../src/cli/unitsCsv.js'
import type { Column, Table } from '../../src/records/index.js'
import type { LineSummary, Results, UnitRows } from '../../src/results.js'

const tableOf = (...columns: Column[]): Table => ({
  file: 'x.csv',
  rowsRead: 3,
  rows: 3,
  lineOfRow: Int32Array.of(2, 3, 4),
  columns: new Map(columns.map((column) => [column.name, column])),
  sha256: '',
})
const line = (id: string, piece?: number): LineSummary => ({
  line: id,
  label: id,
  piece,
  units: { untreated: 0, treated: 0 },
})
const csv = (units: UnitRows, lines: LineSummary[], table: Table, id?: string) =>
  [...unitsCsv({ results: { lines } as unknown as Results, units }, table, id)].join('')

const units: UnitRows = {
  unit: Int32Array.of(0, 2, 2),
  line: Int32Array.of(0, 0, 1),
  treated: Uint8Array.of(1, 0, 1),
  x: Float64Array.of(0.1, -1e-7, 3),
}

describe('unitsCsv', () => {
  it('names units by row, from 1, where there is no id', () => {
    expect(csv(units, [line('10000'), line('20000')], tableOf())).toBe(
      'id,line,side,x\n1,10000,treated,0.1\n3,10000,untreated,-1e-7\n3,20000,treated,3\n',
    )
  })

  it('quotes ids and lines as RFC 4180 asks, and keeps zeros in front', () => {
    const ids: Column = { kind: 'label', name: 'id', codes: Int32Array.of(0, -1, 1), labels: ['007', 'a "b", c'] }
    expect(csv(units, [line('North, 1'), line('S')], tableOf(ids), 'id')).toBe(
      'id,line,side,x\n007,"North, 1",treated,0.1\n"a ""b"", c","North, 1",untreated,-1e-7\n"a ""b"", c",S,treated,3\n',
    )
  })

  it('adds the ground, with empty cells for what is missing', () => {
    const ground = {
      zone: Int32Array.of(1, 0, -1),
      zoneNames: ['Inner', 'Outer'],
      footLon: Float64Array.of(1.5, 2, Number.NaN),
      footLat: Float64Array.of(50, 51, Number.NaN),
      positionMetres: Float64Array.of(0, 12.25, Number.NaN),
    }
    expect(csv({ ...units, ground }, [line('A', 1), line('B', 2)], tableOf())).toBe(
      'id,line,side,x,zone,piece,foot_lon,foot_lat,position_m\n' +
        '1,A,treated,0.1,Outer,1,1.5,50,0\n3,A,untreated,-1e-7,Inner,1,2,51,12.25\n3,B,treated,3,,2,,,\n',
    )
  })
})

describe('resultsJson', () => {
  const results = (extra: object) => ({ format: 'scarp-results/1', ...extra }) as unknown as Results

  it('keeps doubles in full', () => {
    const written = resultsJson(results({ seconds: 0.1 + 0.2, seed: 5e-324, title: 'é\n' }))
    expect(JSON.parse(written)).toEqual({ format: 'scarp-results/1', seconds: 0.1 + 0.2, seed: 5e-324, title: 'é\n' })
    expect(written.endsWith('}\n')).toBe(true)
  })

  it('throws, with the place, on what JSON would quietly turn into null or {}', () => {
    expect(() => resultsJson(results({ lines: [{ units: { treated: Number.NaN } }] }))).toThrow(
      'results.lines.0.units.treated is NaN',
    )
    expect(() => resultsJson(results({ seconds: Number.POSITIVE_INFINITY }))).toThrow('results.seconds is Infinity')
    expect(() => resultsJson(results({ lines: Float64Array.of(1) }))).toThrow('results.lines is not plain data')
  })
})
