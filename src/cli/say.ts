/** Everything the program says on standard error: problems, usage, faults. */
import { type Problem, problemText } from '../problem.js'

const listed = 20

/** One line each, the first twenty, then a count. The same problem met twice is said once. */
export function sayProblems(problems: readonly Problem[]): void {
  const lines = [...new Set(problems.map(problemText))]
  for (const line of lines.slice(0, listed)) say(line)
  const more = lines.length - listed
  if (more > 0) say(`and ${more} more ${more === 1 ? 'problem' : 'problems'}`)
}

export function say(line: string): void {
  process.stderr.write(`${line}\n`)
}

/** One line for a fault of the program; where it happened is shown only to those who ask. */
export function sayFault(error: unknown): void {
  const message = (error instanceof Error ? error.message : String(error)).replace(/\s*[\r\n]+\s*/g, ' ')
  say(
    `scarp: a fault in the program, not in your files: ${message}; please report this line with the command, ` +
      'the study file and what scarp --version prints (SCARP_TRACE=1 shows where it happened)',
  )
  if (process.env.SCARP_TRACE && error instanceof Error && error.stack) say(error.stack)
}

/** Errors of the operating system that a user can mend: no space, no permission, a path that is not a folder. */
export function systemProblem(error: unknown, file: string): Problem | undefined {
  const code = (error as { code?: unknown } | null)?.code
  const todo = typeof code === 'string' ? remedies[code] : undefined
  if (todo === undefined) return undefined
  return { file, what: 'writing', found: (error as Error).message, todo }
}

const remedies: Record<string, string> = {
  ENOSPC: 'make room on this disk, or choose another place with --out',
  EDQUOT: 'make room in your quota, or choose another place with --out',
  EACCES: 'choose a place you may write to with --out',
  EPERM: 'choose a place you may write to with --out',
  EROFS: 'choose a place you may write to with --out',
  ENOTDIR: 'choose a path whose parents are folders with --out',
  ENAMETOOLONG: 'choose a shorter name with --out',
  EMFILE: 'close other programs, or raise the limit of open files',
}
