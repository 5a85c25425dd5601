import { expect, test } from 'vitest'
import { problemText } from '../../src/problem.js'
import { readSchedule } from '../../src/thresholds/index.js'
import { labelColumn } from './labelColumn.js'

test('all problems of a schedule at once, each with its line', () => {
  const schedule = readSchedule({
    by: [
      labelColumn('year', ['2015', '2015', null, '2016', '2015', '2017', null]),
      labelColumn('region', ['North', 'South', 'North', 'North', 'North', 'South', 'North']),
    ],
    value: Float64Array.of(50, 60, 55, Number.NaN, 50, Number.POSITIVE_INFINITY, 55),
    lineOfRow: Int32Array.of(2, 3, 4, 5, 7, 9, 10),
    file: 'rules/cutoffs.csv',
    valueName: 'cutoff',
  })
  expect(schedule.ok ? [] : schedule.problems.map(problemText)).toEqual([
    'rules/cutoffs.csv:4: year: key of the schedule: an empty cell; fill in the year that this cutoff is for, or remove the row',
    'rules/cutoffs.csv:5: cutoff: must be a finite number: an empty cell; give the cutoff in score units, or remove the row',
    'rules/cutoffs.csv:7: year, region: key given twice: year 2015, region North on lines 2 and 7; keep one of the rows',
    'rules/cutoffs.csv:9: cutoff: must be a finite number: Infinity; give the cutoff in score units, or remove the row',
    'rules/cutoffs.csv:10: year: key of the schedule: an empty cell; fill in the year that this cutoff is for, or remove the row',
  ])
})

test('a schedule without rows is a problem', () => {
  const schedule = readSchedule({
    by: [labelColumn('year', [])],
    value: new Float64Array(0),
    lineOfRow: new Int32Array(0),
    file: 'cutoffs.csv',
    valueName: 'cutoff',
  })
  expect(schedule.ok).toBe(false)
})

test('keys that join to the same text stay apart', () => {
  const schedule = readSchedule({
    by: [labelColumn('a', ['x, y', 'x']), labelColumn('b', ['z', 'y, z'])],
    value: Float64Array.of(1, 2),
    lineOfRow: Int32Array.of(2, 3),
    file: 'cutoffs.csv',
    valueName: 'cutoff',
  })
  expect(schedule.ok && schedule.value.cutoffs.size).toBe(2)
})
