/** What the process says to its caller. */
export const exitCodes = {
  done: 0,
  fault: 1,
  /** The command line, the study, a table or a geometry can't be used. */
  unusable: 2,
  /** Results were written, and they hold no estimate. */
  nothingEstimated: 3,
} as const

export type ExitCode = (typeof exitCodes)[keyof typeof exitCodes]
