import { existsSync, readdirSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { largeSetAside, repeatedDistances, repeatedPositions, thinLines, unitsBySide } from '../../src/cli/doubts.js'
import type { Placement } from '../../src/placement.js'
import { borderStudy, newRoom, scarp, scheduleStudy, scoreStudy, writeFiles } from './studies.js'

const room = newRoom()
afterAll(() => rmSync(room, { recursive: true, force: true }))

describe('scarp inspect', () => {
  beforeAll(() => {
    writeFiles(join(room, 'courses'), scheduleStudy())
    writeFiles(join(room, 'grants'), scoreStudy())
    writeFiles(join(room, 'levy'), borderStudy())
  })

  it('gives an account of a sound study, and writes nothing', async () => {
    const before = readdirSync(room)
    const said = await scarp(['inspect', 'courses/study.yaml'], { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toMatch(/^Courses in Marrowdale\nrows read +800\nrows kept +800\nunits placed +800\n/)
    expect(said.stdout).toMatch(/^4 lines +untreated +treated$/m)
    expect(said.stdout).toMatch(/nothing doubtful was found\n$/)
    expect(readdirSync(room)).toEqual(before)
    expect(existsSync(join(room, 'courses-results'))).toBe(false)
  })

  it('names keys that the schedule lacks, and lines with few units', async () => {
    const study = scheduleStudy()
    const pupils = study['pupils.csv'].split('\n')
    const kept = pupils.filter((row, i) => !row.includes(',2002,south') || i % 9 === 0).join('\n')
    const cutoffs = study['cutoffs.csv'].replace('2001,north,40\n', '')
    writeFiles(join(room, 'thin'), { ...study, 'pupils.csv': kept, 'cutoffs.csv': cutoffs })
    const said = await scarp(['inspect', 'thin/study.yaml'], { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    expect(said.stdout).toMatch(/^keys that the schedule lacks, and units\n.*2001.*north.* 201$/m)
    expect(said.stdout).toMatch(/^ {2}1 line has fewer than 20 units on a side: .*2002.*south/m)
    expect(said.stdout).toMatch(/% of the rows kept are not placed/)
  })

  it('measures the border', async () => {
    const said = await scarp(['inspect', 'levy/study.yaml'], { cwd: room })
    expect(said).toMatchObject({ code: 0, stderr: '' })
    // 0.02 degrees of latitude at 50 N: 2 * 1112.4 m (geographiclib).
    expect(said.stdout).toMatch(/^border: 2\.2 km in 2 pieces of 1 pair/m)
  })

  it('lists every problem, as run does', async () => {
    const study = scoreStudy()
    writeFiles(join(room, 'bad'), {
      ...study,
      'study.yaml': study['study.yaml'].replace('below', 'under').replace('50', 'x'),
    })
    const said = await scarp(['inspect', 'bad/study.yaml'], { cwd: room })
    expect(said).toMatchObject({ code: 2, stdout: '' })
    expect(said.stderr.trimEnd().split('\n')).toHaveLength(2)
  })
})

describe('doubts', () => {
  const placementOf = (x: number[], line: number[], lines: string[]): Placement => ({
    lines: lines.map((id) => ({ id, label: id })),
    unit: Int32Array.from(x, (_, i) => i),
    line: Int32Array.from(line),
    x: Float64Array.from(x),
    treated: Uint8Array.from(x, (value) => (value > 0 ? 1 : 0)),
  })

  it('tell lines without units, with one side, and with few', () => {
    const placement = placementOf([1, 2, -1, 1], [0, 0, 1, 1], ['A', 'B', 'C'])
    expect(thinLines(placement, unitsBySide(placement))).toEqual([
      '1 line has no units: C',
      '1 line has units on one side alone: A',
      '1 line has fewer than 20 units on a side: B',
    ])
  })

  it('tell a score in steps from one that varies', () => {
    const steps = Array.from({ length: 100 }, (_, i) => (i % 10) - 5)
    expect(
      repeatedDistances(
        placementOf(
          steps,
          steps.map(() => 0),
          ['A'],
        ),
      ),
    ).toEqual(['the score takes 10 distinct distances among 100 units: ties at every step'])
    const fine = steps.map((_, i) => i / 7)
    expect(
      repeatedDistances(
        placementOf(
          fine,
          fine.map(() => 0),
          ['A'],
        ),
      ),
    ).toEqual([])
  })

  it('count units at one point, and leave missing positions out', () => {
    const lon = Float64Array.of(1, 1, 1, 2, Number.NaN, Number.NaN)
    const lat = Float64Array.of(5, 5, 6, 5, 5, 5)
    expect(repeatedPositions(lon, lat)).toEqual(['1 of 4 units stand where another one does'])
  })

  it('tell a large share set aside', () => {
    expect(largeSetAside(80, 100)).toEqual([])
    expect(largeSetAside(79, 100)).toEqual(['21% of the rows kept are not placed'])
    expect(largeSetAside(0, 0)).toEqual([])
  })
})
