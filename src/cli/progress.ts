/** One line on the terminal that says what is being done; nothing at all where standard error is not a terminal. */
import { styleText } from 'node:util'
import type { Progress } from '../analyze.js'

const width = 24
const millisecondsBetween = 80

export interface ProgressLine {
  readonly progress?: Progress
  /** Wipes the line, before anything else is written. */
  readonly clear: () => void
}

export function progressLine(quiet: boolean): ProgressLine {
  const { stderr } = process
  if (quiet || !stderr.isTTY) return { clear: () => {} }
  let drawn = ''
  let stageDrawn = ''
  let last = 0
  const progress: Progress = (stage, done, total) => {
    const now = Date.now()
    if (stage === stageDrawn && done < total && now - last < millisecondsBetween) return
    const text = lineText(stage, done, total)
    if (text === drawn) return
    stderr.write(`\r\x1b[K${text}`)
    drawn = text
    stageDrawn = stage
    last = now
  }
  const clear = () => {
    if (drawn !== '') stderr.write('\r\x1b[K')
    drawn = ''
  }
  return { progress, clear }
}

function lineText(stage: string, done: number, total: number): string {
  const share = total > 0 ? Math.min(1, done / total) : 0
  const full = Math.round(share * width)
  const { stderr: stream } = process
  const bar = styleText('cyan', '█'.repeat(full), { stream }) + styleText('dim', '░'.repeat(width - full), { stream })
  return `${bar} ${`${Math.floor(share * 100)}`.padStart(3)}% ${stage}`
}
