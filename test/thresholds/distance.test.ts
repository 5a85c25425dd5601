import { expect, test } from 'vitest'
import { placeByDistance } from '../../src/thresholds/index.js'
import { labelColumn } from './labelColumn.js'

const distance = Float64Array.of(-3, 0, 2.5, Number.NaN, 7, Number.NEGATIVE_INFINITY, -0.5)

test('without names there is one line, and 0 has no side', () => {
  const { placement, setAside } = placeByDistance({ distance })
  expect(placement.lines).toEqual([{ id: 'all', label: 'all units' }])
  expect(Array.from(placement.unit)).toEqual([0, 2, 4, 6])
  expect(Array.from(placement.x)).toEqual([-3, 2.5, 7, -0.5])
  expect(Array.from(placement.treated)).toEqual([0, 1, 1, 0])
  expect(Object.fromEntries(setAside)).toEqual({
    'distance missing': 1,
    'distance not finite': 1,
    'exactly on the line': 1,
  })
})

test('named lines sort by number', () => {
  const name = labelColumn('piece', ['10', '9', '9', '9', null, '9', '100'])
  const { placement, setAside } = placeByDistance({ distance, name })
  expect(placement.lines).toEqual([
    { id: '9', label: 'piece 9' },
    { id: '10', label: 'piece 10' },
    { id: '100', label: 'piece 100' },
  ])
  expect(Array.from(placement.line)).toEqual([1, 0, 2])
  expect(setAside.get('name of the line missing')).toBe(1)
})
