/** Two runs side by side, as lines for the terminal: first why, then what moved. */
import type { ComparedRuns, HeldAlone, MovedNumber, Reworded } from '../results.js'
import { count, significant } from './numbers.js'
import { padded } from './padded.js'

const rowsShown = 40
const namesShown = 10

export interface ComparedTextOptions {
  /** Every number, not the main ones alone. */
  readonly all: boolean
}

export function comparedLines(compared: ComparedRuns, { all }: ComparedTextOptions): string[] {
  const { moved, reworded, only } = compared
  const isSame = moved.length + reworded.length + only.first.length + only.second.length === 0
  return [
    ...differenceLines(compared, isSame),
    ...lineLines(compared),
    ...(isSame ? [`nothing moved: ${count(compared.equal)} numbers are equal to the last bit`] : []),
    ...movedLines(moved, all),
    ...rewordedLines(reworded, all),
    ...(all ? [...heldLines('first', only.first), ...heldLines('second', only.second)] : []),
    ...(isSame ? [] : [restLine(compared, all)]),
  ]
}

function differenceLines({ differs }: ComparedRuns, isSame: boolean): string[] {
  const none = isSame
    ? 'the runs agree in options, inputs and version'
    : 'the runs agree in options, inputs and version: what moved the numbers is not in these folders'
  if (differs.length === 0) return [none]
  const rows = differs.map(({ key, first, second }) => [`  ${key}`, ...[first, second].map(shortened)])
  return ['what differs between the runs', ...padded([['', 'first', 'second'], ...rows], [0, 1, 2])]
}

/** Twelve digits tell two hashes apart. */
function shortened(value: string | null): string {
  return value === null ? '(none)' : value.replace(/\b([0-9a-f]{12})[0-9a-f]{52}\b/g, '$1')
}

function lineLines({ lines, estimability }: ComparedRuns): string[] {
  const named = (title: string, names: readonly string[]) =>
    names.length === 0 ? [] : [title, ...names.slice(0, namesShown).map((name) => `  ${name}`), ...more(names.length)]
  const changes = (now: 'estimated' | 'not estimated') =>
    estimability.filter((one) => one.now === now).map(({ what, reason }) => `${what}: ${reason}`)
  return [
    ...named('lines in the second run alone', lines.appeared),
    ...named('lines in the first run alone', lines.disappeared),
    ...named('no longer estimated', changes('not estimated')),
    ...named('estimated now, and not before', changes('estimated')),
  ]
}

const more = (length: number) => (length > namesShown ? [`  and ${count(length - namesShown)} more`] : [])

function movedLines(moved: readonly MovedNumber[], all: boolean): string[] {
  const chosen = all ? moved : moved.filter(({ main }) => main)
  if (chosen.length === 0) return []
  const shown = all ? chosen : chosen.slice(0, rowsShown)
  const rows = shown.map((one) => [
    `  ${wordsOf(one.path)}`,
    ...told(one.first, one.second),
    signed(one.difference),
    one.in_standard_errors === null ? '' : signed(one.in_standard_errors),
  ])
  const leftOut = chosen.length - shown.length
  return [
    all ? 'numbers that moved, farthest first' : 'main numbers that moved, farthest first',
    ...padded([['', 'first', 'second', 'difference', 'in standard errors'], ...rows]),
    ...(leftOut > 0 ? [`  and ${count(leftOut)} more main numbers; --all lists them`] : []),
  ]
}

/** Both values; in full where four digits do not tell them apart. */
function told(first: number, second: number): [string, string] {
  const [a, b] = [significant(first), significant(second)]
  return a === b ? [`${first}`, `${second}`] : [a, b]
}

const signed = (value: number) => `${value > 0 ? '+' : ''}${significant(value)}`

function rewordedLines(reworded: readonly Reworded[], all: boolean): string[] {
  const chosen = all ? reworded : reworded.filter(({ main }) => main)
  if (chosen.length === 0) return []
  return [
    all ? 'words that changed' : 'verdicts that changed',
    ...chosen.map(({ path, first, second }) => `  ${wordsOf(path)}: ${first} -> ${second}`),
  ]
}

function heldLines(run: string, held: readonly HeldAlone[]): string[] {
  if (held.length === 0) return []
  return [`in the ${run} run alone`, ...held.map(({ path, value }) => `  ${wordsOf(path)}: ${value}`)]
}

/** What is not listed above. */
function restLine({ moved, reworded, only, equal }: ComparedRuns, all: boolean): string {
  const other = (list: readonly { readonly main: boolean }[]) => list.filter(({ main }) => !main).length
  const alone = only.first.length + only.second.length
  const rest = all
    ? []
    : [
        ...(other(moved) > 0 ? [`${count(other(moved))} other numbers moved`] : []),
        ...(other(reworded) > 0 ? [`${count(other(reworded))} other words changed`] : []),
        ...(alone > 0 ? [`${count(alone)} entries are in one run alone`] : []),
      ]
  const listed = rest.length > 0 ? '; --all lists them' : ''
  return `${[...rest, `${count(equal)} numbers are equal to the last bit`].join(', ')}${listed}`
}

/** `soil_kept, 2019 Ruspel: corrected estimate`. */
function wordsOf(path: readonly string[]): string {
  const bare = (part: string) => part.slice(1, -1)
  const isOfOutcome = path[0] === 'outcomes' && path.length > 2
  const rest = isOfOutcome ? path.slice(2) : path
  const isOfLine = rest[0] === 'lines' && rest.length > 2
  const words = (isOfLine ? rest.slice(2) : rest).map((part) => (part.startsWith('[') ? bare(part) : part))
  const about = [...(isOfOutcome ? [bare(path[1])] : []), ...(isOfLine ? [bare(rest[1])] : [])]
  return `${about.join(', ')}${about.length > 0 ? ': ' : ''}${words.join(' ').replaceAll('_', ' ')}`
}
