/**
 * A refusal as data: what a person wrote that can't be used, and what to do about it.
 * Rooms collect problems and go on; text is made last.
 */
export interface Problem {
  /** The file as the user named it. */
  readonly file: string
  /** Line in that file, from 1. */
  readonly line?: number
  /** Feature of a GeoJSON file, from 0, where there is no useful line. */
  readonly feature?: number
  /** What is wrong, beginning with the key or column it is about. */
  readonly what: string
  /** What was found there. */
  readonly found: string
  /** What to do. */
  readonly todo: string
}

/** `FILE:LINE: what is wrong: what was found; what to do` on one line. */
export function problemText(problem: Problem): string {
  const place =
    problem.line !== undefined
      ? `${problem.file}:${problem.line}`
      : problem.feature !== undefined
        ? `${problem.file}: feature ${problem.feature}`
        : problem.file
  return `${place}: ${problem.what}: ${problem.found}; ${problem.todo}`.replace(/\s*[\r\n]+\s*/g, ' ')
}

/** Either a value, or everything that is wrong. */
export type Checked<T> =
  | { readonly ok: true; readonly value: T }
  | { readonly ok: false; readonly problems: readonly Problem[] }
