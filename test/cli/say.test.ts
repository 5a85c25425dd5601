import { afterEach, expect, it, vi } from 'vitest'
import { sayFault, sayProblems, systemProblem } from '../../src/cli/say.js'

let said = ''
const listen = () => {
  said = ''
  vi.spyOn(process.stderr, 'write').mockImplementation((text) => {
    said += text
    return true
  })
}
afterEach(() => {
  vi.restoreAllMocks()
  vi.unstubAllEnvs()
})

const problem = (line: number) => ({ file: 'a.csv', line, what: 'rent', found: 'high', todo: 'write a number' })

it('lists twenty problems, then counts, and says the same one once', () => {
  listen()
  sayProblems([problem(1), ...Array.from({ length: 25 }, (_, i) => problem(i + 1))])
  const lines = said.trimEnd().split('\n')
  expect(lines).toHaveLength(21)
  expect(lines[0]).toBe('a.csv:1: rent: high; write a number')
  expect(lines[20]).toBe('and 5 more problems')
})

it('says one line for a fault of the program, and its stack only when asked', () => {
  listen()
  sayFault(new RangeError('x has 812 rows,\n y has 811'))
  expect(said).toMatch(
    /^scarp: a fault in the program, not in your files: x has 812 rows, y has 811; please report.*\n$/,
  )
  vi.stubEnv('SCARP_TRACE', '1')
  listen()
  sayFault(new RangeError('x has 812 rows, y has 811'))
  expect(said).toContain('\n    at ')
})

it('knows what a user can mend from what is a fault', () => {
  expect(systemProblem(Object.assign(new Error('ENOSPC: no space left'), { code: 'ENOSPC' }), 'out')).toEqual({
    file: 'out',
    what: 'writing',
    found: 'ENOSPC: no space left',
    todo: 'make room on this disk, or choose another place with --out',
  })
  expect(systemProblem(new RangeError('x'), 'out')).toBeUndefined()
  expect(systemProblem(undefined, 'out')).toBeUndefined()
})
