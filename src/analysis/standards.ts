/**
 * The requirements that the What Works Clearinghouse handbook (Institute of Education Sciences, version 5.0) puts to such
 * designs, answered with the study's own numbers. The wording is ours, from memory, and no quotation. What only people
 * can know is not answered for them.
 */
import type { CheckResult, Jump, OutcomeResult, StandardsRow } from '../results.js'
import type { Study } from '../study/index.js'
import { shown } from './words.js'

/** First-stage F below which the handbook holds a ratio for weak. */
export const leastF = 16
/** Distinct values of the score on either side below which it holds that no curve can be told. */
const leastValues = 4

type Answer = Pick<StandardsRow, 'answer' | 'says' | 'exhibit'>

export interface StandardsFacts {
  /** Units placed, and those that lack the outcome. */
  readonly placed: number
  readonly missing: number
  /** Fewest distinct distances within the bandwidth on a side of the pooled estimate, counted to 10. */
  readonly distinct: number | undefined
}

/** One row for each requirement. `result` is the outcome as far as it is estimated and checked. */
export function standardsSheet(study: Study, result: OutcomeResult, facts: StandardsFacts): StandardsRow[] {
  const pooled = 'not_estimated' in result.pooled ? undefined : result.pooled
  const row = (requirement: string, answer: Answer): StandardsRow => ({ requirement, ...answer })
  return [
    row('The score and the cutoff alone decided who was assigned, and the cutoff was not chosen for its result', {
      answer: 'the program cannot know',
      says: 'ask who drew the line, when, and whether exceptions were made',
      exhibit: 'study.resolved.yaml',
    }),
    row('Units could not choose on which side they fall', integrity(result.checks)),
    row('Outcomes are not missing more on one side than on the other', attrition(result.checks, facts)),
    row('Nothing else jumps at the line', continuity(study, result.checks)),
    row('Nothing jumps where there is no line', elsewhere(result.checks)),
    row(
      'The curve is local, with a bandwidth chosen by a rule, and other choices are shown',
      form(study, result.checks),
    ),
    row('There is a graph of the outcome against the score', {
      answer: pooled ? 'met' : 'not met',
      says: pooled ? 'binned means on both sides, drawn for this outcome' : 'there is no pooled estimate to draw',
      exhibit: 'figures/',
    }),
    row(`The score has at least ${leastValues} values on each side near the line`, values(facts)),
    row(
      `Where not all take up what they are assigned to, take-up jumps clearly (F of ${leastF} or more)`,
      takeUp(pooled),
    ),
    row('Where units come in groups, standard errors allow for it', groups(study, pooled)),
    row('Where there are several lines, each is shown and their average is named', lines(result)),
  ]
}

function find(checks: readonly CheckResult[], names: readonly string[]): readonly CheckResult[] {
  return checks.filter(({ check, verdict }) => names.includes(check) && verdict !== 'not possible')
}

/** Met where every check of these names is fine, not met where one fails or is in doubt. */
function byChecks(checks: readonly CheckResult[], names: readonly string[], without: string): Answer {
  const found = find(checks, names)
  if (found.length === 0) return { answer: 'the program cannot know', says: without, exhibit: 'checks.csv' }
  const bad = found.filter(({ verdict }) => verdict !== 'fine')
  return {
    answer: bad.length === 0 ? 'met' : 'not met',
    says: (bad.length > 0 ? bad : found)
      .slice(0, 3)
      .map(({ check, line, says }) => `${check}${line === undefined ? '' : ` at ${line}`}: ${says}`)
      .join('; '),
    exhibit: 'checks.csv',
  }
}

function integrity(checks: readonly CheckResult[]): Answer {
  const names = ['density', 'density, line by line', 'units per km²']
  const counted = byChecks(checks, names, 'the counts of units at the line were not checked')
  return counted.answer === 'met'
    ? { ...counted, says: `${counted.says}; whether anyone could move a score is for people to say` }
    : counted
}

function attrition(checks: readonly CheckResult[], { placed, missing }: StandardsFacts): Answer {
  const share = placed > 0 ? `${((100 * missing) / placed).toFixed(1)}%` : 'none'
  const overall = `${share} of units placed lack the outcome`
  if (missing === 0) return { answer: 'met', says: `${overall}`, exhibit: 'results.json' }
  const jump = find(checks, ['missing outcome'])
  if (jump.length === 0)
    return { answer: 'the program cannot know', says: `${overall}; its jump was not checked`, exhibit: 'checks.csv' }
  return {
    answer: jump.every(({ verdict }) => verdict === 'fine') ? 'met' : 'not met',
    says: `${overall}; ${jump[0].says}`,
    exhibit: 'checks.csv',
  }
}

function continuity(study: Study, checks: readonly CheckResult[]): Answer {
  if (study.predetermined.length === 0) {
    const says = 'no predetermined columns are named in the study'
    return { answer: 'the program cannot know', says, exhibit: 'study.resolved.yaml' }
  }
  return byChecks(checks, ['balance, joint'], 'the predetermined columns could not be checked')
}

function elsewhere(checks: readonly CheckResult[]): Answer {
  const names = ['placebo line', 'borders that change nothing', 'shifted lines']
  return byChecks(checks, names, 'no line that is none could be drawn')
}

function form({ estimation }: Study, checks: readonly CheckResult[]): Answer {
  const { bandwidth, order, kernel } = estimation
  const shape = `order ${order}, ${kernel} kernel`
  if (bandwidth.kind === 'fixed')
    return {
      answer: 'the program cannot know',
      says: `${shape}; the bandwidth is the study's own number, to be justified there`,
      exhibit: 'study.resolved.yaml',
    }
  const ladder = find(checks, ['bandwidth'])
  return {
    answer: 'met',
    says: `${shape}, bandwidth by the rule ${bandwidth.rule}${ladder.length > 0 ? `; ${ladder[0].says}` : ''}`,
    exhibit: 'checks.csv',
  }
}

function values({ distinct }: StandardsFacts): Answer {
  if (distinct === undefined)
    return { answer: 'the program cannot know', says: 'there is no pooled estimate', exhibit: 'results.json' }
  const says = distinct >= 10 ? '10 or more on each side' : `${distinct} on the side that has fewer`
  return { answer: distinct >= leastValues ? 'met' : 'not met', says, exhibit: 'results.json' }
}

function takeUp(pooled: Jump | undefined): Answer {
  const found = pooled?.take_up
  if (!found)
    return {
      answer: 'not applicable',
      says: 'because the study names no column of take-up: the jump is that of being assigned',
      exhibit: 'study.resolved.yaml',
    }
  return {
    answer: found.f === null || found.f >= leastF ? 'met' : 'not met',
    says: `take-up jumps by ${shown(found.jump)}, ${found.f === null ? found.f_reason : `F = ${shown(found.f)}`}`,
    exhibit: 'pooled.csv',
  }
}

function groups({ records }: Study, pooled: Jump | undefined): Answer {
  if (pooled?.clusters !== undefined) {
    const by = records.cluster === undefined ? 'border piece' : String(records.cluster)
    return { answer: 'met', says: `clustered by ${by}, ${pooled.clusters} clusters`, exhibit: 'pooled.csv' }
  }
  const says = `the variance is ${pooled?.variance ?? 'not estimated'}, by unit; whether units come in groups is for people to say`
  return { answer: 'the program cannot know', says, exhibit: 'study.resolved.yaml' }
}

function lines(result: OutcomeResult): Answer {
  const count = result.lines.length
  if (count === 1) return { answer: 'not applicable', says: 'because there is one line', exhibit: 'lines.csv' }
  const made = result.lines.filter((line) => !('not_estimated' in line)).length
  const target =
    'not_estimated' in result.target ? 'no target could be estimated' : `the target is by ${result.target.kind}`
  return {
    answer: made > 0 ? 'met' : 'not met',
    says: `${made} of ${count} lines have an estimate of their own; weights are printed; ${target}`,
    exhibit: 'lines.csv',
  }
}
