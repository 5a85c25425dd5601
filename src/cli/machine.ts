/** What a run ran on and what it took, for a reader who wants to run it again. */
import { availableParallelism, totalmem } from 'node:os'
import type { Results } from '../results.js'

export interface MachineFacts {
  /** `v20.20.2` */
  readonly node: string
  readonly system: string
  readonly cores: number
  readonly memoryGigabytes: number
  /** The most that this process has held so far. */
  readonly peakMegabytes: number
}

export function machineFacts(): MachineFacts {
  return {
    node: process.version,
    system: `${process.platform} ${process.arch}`,
    cores: availableParallelism(),
    memoryGigabytes: Math.round(totalmem() / 1e9),
    peakMegabytes: Math.round(process.resourceUsage().maxRSS / 1000),
  }
}

/** log.txt: the one file that differs from run to run. */
export function runLog(results: Results, machine: MachineFacts, summary: readonly string[]): string {
  const { started, seconds, seed, version } = results
  return `${[
    `started ${started}, ${seconds} s to the numbers`,
    `scarp ${version}, Node ${machine.node}, ${machine.system}, ${machine.cores} cores, ${machine.memoryGigabytes} GB of memory`,
    `most memory in use ${machine.peakMegabytes} MB`,
    `seed ${seed}`,
    '',
    ...summary,
  ].join('\n')}\n`
}
