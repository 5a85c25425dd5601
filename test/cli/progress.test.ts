import { WriteStream } from 'node:tty'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { progressLine } from '../../src/cli/progress.js'

const { stderr } = process
const terminal = Object.getOwnPropertyDescriptor(stderr, 'isTTY')
let said = ''

function pretend(isTTY: boolean): void {
  Object.defineProperty(stderr, 'isTTY', { value: isTTY, configurable: true })
  // What a terminal's stream has: it answers by NO_COLOR, FORCE_COLOR and TERM.
  Object.defineProperty(stderr, 'getColorDepth', { value: WriteStream.prototype.getColorDepth, configurable: true })
}

beforeEach(() => {
  said = ''
  vi.spyOn(stderr, 'write').mockImplementation((text) => {
    said += text
    return true
  })
})
afterEach(() => {
  vi.restoreAllMocks()
  vi.unstubAllEnvs()
  if (terminal) Object.defineProperty(stderr, 'isTTY', terminal)
  else delete (stderr as { isTTY?: boolean }).isTTY
  delete (stderr as { getColorDepth?: unknown }).getColorDepth
})

describe('progressLine', () => {
  it('draws one line over itself on a terminal, and wipes it', () => {
    pretend(true)
    vi.stubEnv('FORCE_COLOR', undefined)
    vi.stubEnv('NO_COLOR', '1')
    const { progress, clear } = progressLine(false)
    progress!('placing', 1, 4)
    progress!('placing', 4, 4)
    clear()
    clear()
    expect(said).toBe(
      `\r\x1b[K${'█'.repeat(6)}${'░'.repeat(18)}  25% placing\r\x1b[K${'█'.repeat(24)} 100% placing\r\x1b[K`,
    )
  })

  it('is coloured only where colour is not refused', () => {
    pretend(true)
    vi.stubEnv('NO_COLOR', undefined)
    vi.stubEnv('FORCE_COLOR', '1')
    progressLine(false).progress!('placing', 1, 4)
    expect(said).toContain('\x1b[36m')
  })

  it('does not redraw faster than an eye follows', () => {
    pretend(true)
    const { progress } = progressLine(false)
    for (let done = 1; done < 1_000_000; done++) progress!('placing', done, 1_000_000_000)
    expect(said.split('\r').length).toBeLessThan(50)
  })

  it('says nothing off a terminal, or when told to be quiet', () => {
    pretend(false)
    expect(progressLine(false).progress).toBeUndefined()
    pretend(true)
    const { progress, clear } = progressLine(true)
    clear()
    expect(progress).toBeUndefined()
    expect(said).toBe('')
  })
})
