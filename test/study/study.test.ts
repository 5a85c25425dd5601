import { describe, expect, it } from 'vitest'
import { problemText } from '../../src/problem.js'
import { readStudy, resolvedStudy } from '../../src/study/index.js'
import { badCases, goodCases } from './cases.js'

const file = 'boundaries/tidemark/study.yaml'

function studyOf(text: string, name = file) {
  const read = readStudy(text, name)
  if (!read.ok) throw new Error(read.problems.map(problemText).join('\n'))
  return read.value
}

describe('good studies', () => {
  it.each(goodCases)('$name', ({ text, gives }) => {
    expect(studyOf(text)).toMatchObject(gives)
  })

  it.each(goodCases)('written out and read back: $name', ({ text }) => {
    const study = studyOf(text)
    const written = resolvedStudy(study)
    expect(studyOf(written, 'elsewhere.yaml')).toStrictEqual(study)
    expect(resolvedStudy(studyOf(written, 'elsewhere.yaml'))).toBe(written)
  })
})

describe('bad studies', () => {
  it.each(badCases)('$name', ({ text, problems }) => {
    const read = readStudy(text, file)
    expect(read.ok ? [] : read.problems.map(problemText)).toEqual(problems.map((problem) => `${file}:${problem}`))
  })
})

it('takes the title from the folder, else says Study', () => {
  const text = goodCases[0].text
  const titles = ['a/tidemark/study.yaml', 'C:\\work\\tidemark\\study.yaml', 'study.yaml', './study.yaml', '../s.yaml']
  expect(titles.map((name) => studyOf(text, name).title)).toEqual(['tidemark', 'tidemark', 'Study', 'Study', 'Study'])
})

it('does not grow with aliases that multiply', () => {
  const levels = Array.from(
    { length: 12 },
    (_, k) =>
      `k${k}: &a${k} [${Array(9)
        .fill(k ? `*a${k - 1}` : 'x')
        .join(', ')}]`,
  )
  const read = readStudy(levels.join('\n'), file)
  expect(read.ok).toBe(false)
})

it('writes keys in the order of the interface, every default filled in', () => {
  const text = 'outcomes: [y]\nline: {treated: [7], zones: z.geojson}\nrecords: {position: [a, b], file: r.csv}\n'
  expect(resolvedStudy(studyOf(text))).toBe(`title: tidemark
records:
  file: r.csv
  position:
    - a
    - b
outcomes:
  - y
line:
  zones: z.geojson
  zone_name: name
  treated:
    - "7"
  outside: set-aside
  unit: m
  snap: 2
  piece: 1000
  barriers: []
  overlaps: []
  position_error: 0
  corner: 0
  repeated_points: keep
estimation:
  order: 1
  kernel: triangular
  bandwidth: mse
  sides: common
  interval: auto
  smoothness: rule
  reference: t
  donut: 0
  level: 0.95
pooling:
  fixed_effects: true
  target: units
checks: standard
disclosure:
  coordinates: false
  smallest_cell: 10
seed: 1
`)
})
