/** Rows of a file of shares against lines written out by hand. */
import { expect, it } from 'vitest'
import { readShares } from '../../src/analysis/sharesOfFile.js'
import type { Line } from '../../src/placement.js'
import type { Column, Table } from '../../src/records/index.js'

function label(name: string, values: readonly string[]): Column {
  return { kind: 'label', name, labels: values, codes: Int32Array.from(values.keys()) }
}

function tableOf(names: readonly (readonly string[])[], shares: readonly number[]): Table {
  const columns: Column[] = names.map((values, k) => label(`name${k}`, values))
  columns.push({ kind: 'number', name: 'people', values: Float64Array.from(shares) })
  const rows = shares.length
  const lineOfRow = Int32Array.from(shares, (_, row) => row + 2)
  const named = new Map(columns.map((column) => [column.name, column]))
  return { file: 'people.csv', rowsRead: rows, rows, lineOfRow, columns: named, sha256: '' }
}

const piece = (number: number, zones: readonly [string, string], lengthMetres: number): Line => {
  const id = `${zones[0]} | ${zones[1]}, piece ${number}`
  return { id, label: id, zones, piece: number, lengthMetres }
}

const border = [piece(1, ['Moor', 'Weir'], 100), piece(2, ['Moor', 'Weir'], 300), piece(1, ['Moor', 'Quay'], 500)]

it('divides the share of a pair by the length of its pieces, whichever zone comes first', () => {
  const table = tableOf(
    [
      ['Weir', 'Moor', 'Quay'],
      ['Moor', 'Quay', 'Weir'],
    ],
    [80, 20, 7],
  )
  const read = readShares(
    { shares: 'people.csv', line: ['name0', 'name1'], value: 'people' },
    { shares: table },
    border,
  )
  if (!read.ok) throw new Error(read.problems[0].what)
  expect([...read.value.shares]).toEqual([20, 60, 20])
  expect(read.value.entries.filter(({ line }) => line === undefined)).toEqual([{ share: 7 }])
})

it('takes a piece by its own name', () => {
  const table = tableOf([['Moor | Weir, piece 2', 'Moor | Quay, piece 1', 'Moor | Weir, piece 1']], [1, 0, 5])
  const read = readShares({ shares: 'people.csv', line: ['name0'], value: 'people' }, { shares: table }, border)
  if (!read.ok) throw new Error(read.problems[0].what)
  expect([...read.value.shares]).toEqual([5, 1, 0])
})
