/**
 * README.md of a replication folder, in the order that data editors of social science journals ask for: availability,
 * provenance, requirements, exhibits, instructions. What only the author knows is a blank that says so.
 */
import type { Results } from '../results.js'
import { escapeMarkdown } from './escape.js'
import { type Exhibit, exhibitRows } from './exhibitList.js'
import { count } from './numbers.js'

export interface ReplicationFacts {
  readonly results: Results
  /** The study as given, in the folder. */
  readonly study: string
  /** What it reads. */
  readonly inputs: readonly { readonly file: string; readonly sha256: string; readonly bytes: number }[]
  /** Whether the inputs are in the folder. */
  readonly hasInputs: boolean
  readonly units?: {
    readonly rows: number
    readonly columns: readonly string[]
    readonly lines?: readonly string[]
    readonly leftOut: readonly string[]
    /** Whether estimates from the units are others for what is left out. */
    readonly isAltered: boolean
    /** What distances are in. */
    readonly xUnit: string
  }
  readonly exhibits: readonly Exhibit[]
  readonly machine: {
    readonly node: string
    readonly system: string
    readonly cores: number
    readonly memoryGigabytes: number
    readonly peakMegabytes: number
  }
}

/** A blank. None is left where the text has no `AUTHOR` any more. */
const author = (what: string) => `**[AUTHOR: ${what}]**`

export function replicationReadme(facts: ReplicationFacts): string {
  const { results } = facts
  return `${[
    `# Replication folder: ${escapeMarkdown(results.title)}`,
    `Made by scarp ${results.version} from the study \`${facts.study}\`. ${author('citation of the paper, authors, contact')}. Blanks like this one are for the author to fill in; everything else was written by the program.`,
    '## Data availability and provenance',
    ...availability(facts),
    '## Computational requirements',
    ...requirements(facts),
    '## What is in this folder',
    ...contents(facts),
    '## Instructions',
    ...instructions(facts),
    '## Exhibits',
    `Every exhibit is made by the one command above. Files of one row hold the same in each of their formats. ${author('in the first column, the number of the table or figure in the paper, where it is in it')}`,
    exhibitRows(facts.exhibits).join('\n'),
    '## Licences',
    ...licences(facts),
  ].join('\n\n')}\n`
}

function availability({ results, inputs, hasInputs }: ReplicationFacts): string[] {
  const sizes = new Map(results.inputs.map((input) => [input.file, input]))
  const rows = inputs.map(({ file, sha256, bytes }) => {
    const { rows, features } = sizes.get(file) ?? {}
    const size =
      rows !== undefined
        ? `${count(rows)} rows`
        : features !== undefined
          ? `${count(features)} ${features === 1 ? 'feature' : 'features'}`
          : ''
    return `| \`${file}\` | ${size} | ${count(bytes)} | \`${sha256}\` | ${author('source, year, version, how obtained')} |`
  })
  return [
    '### Rights',
    `- ${author('I certify that I have legitimate access to and permission to use the data: yes or no')}`,
    `- ${author('I certify that I have permission to redistribute the data in this folder: yes, no, or which files')}`,
    '### Availability',
    hasInputs
      ? `All files that the study reads are in \`inputs/\`. ${author('confirm that all of them may be public, or say who may have them')}`
      : `The files that the study reads are not in this folder. ${author('say for each whether it is public, can be bought or applied for, or can not be shared; where, at what cost, and how long it takes')}`,
    '### Files',
    ['| File | Size | Bytes | SHA-256 | Provenance |', '| :--- | ---: | ---: | :--- | :--- |', ...rows].join('\n'),
    `Rows read ${count(results.placement.read)}, kept by the study's condition ${count(results.placement.kept)}, placed against a line ${count(results.placement.placed)}. Paths are relative to the study. A file with another hash is not the file that these results came from.`,
  ]
}

function requirements({ results, machine, inputs }: ReplicationFacts): string[] {
  const megabytes = Math.ceil(inputs.reduce((sum, { bytes }) => sum + bytes, 0) / 1e6)
  return [
    [
      `- Software: scarp ${results.version} on Node.js ${machine.node.replace(/^v/, '')}; no other program and no network. ${author('where this version can be had, or put it beside this folder')}`,
      `- Randomness: every draw follows from the seed ${results.seed} of the study; the same study, data and seed give the same bytes.`,
      `- Time: ${results.seconds.toFixed(1)} seconds to the numbers, on ${machine.system} with ${machine.cores} cores and ${machine.memoryGigabytes} GB of memory.`,
      `- Memory: ${count(machine.peakMegabytes)} MB at most. Inputs: ${megabytes} MB.`,
      '- The log of that run is `log.txt`.',
    ].join('\n'),
  ]
}

function contents({ results, study, units, hasInputs }: ReplicationFacts): string[] {
  return [
    [
      '| Path | Holds |',
      '| :--- | :--- |',
      `| \`${study}\` | the study as given${hasInputs ? ', beside the files it reads' : '; the files it reads belong beside it'} |`,
      '| `results/` | every exhibit and number as published; `results/study.resolved.yaml` is the study with every default filled in |',
      ...(results.border
        ? ['| `results/borders.geojson` | the geometry as it was used: every piece of border, in use or set aside |']
        : []),
      '| `drawn.json` | what figures and maps are drawn from beside the numbers: binned means and the geometry as drawn |',
      ...(units ? ['| `units/` | the units without coordinates and ids, and the study that reads them |'] : []),
      '| `replication.json` | versions, seed, and the SHA-256 of every input and every file here |',
      '| `log.txt` | when, where and how long it ran |',
    ].join('\n'),
    ...(units ? unitsWords(units) : []),
  ]
}

function unitsWords({
  rows,
  columns,
  lines,
  leftOut,
  isAltered,
  xUnit,
}: NonNullable<ReplicationFacts['units']>): string[] {
  const ofLines = lines ? linesWords(lines, xUnit) : []
  return [
    `**\`units/units.csv\` has one row for each of ${count(rows)} units, with its outcomes (columns ${columns.map((name) => `\`${name}\``).join(', ')}). No coordinate and no id is in it, clusters are numbered anew, and rows are not in the order of the records. It is still data about single units: distance, line and the other columns together may tell who somebody is. Check it against the licence of the data before you share this folder.** ${author('confirm that it may be shared, or delete units/ and make the folder anew with --without-units')}`,
    ...ofLines,
    ...(leftOut.length > 0
      ? [
          `The study of these units lacks what is listed here${isAltered ? ', and its estimates are not the published ones for that' : ''}:`,
          leftOut.map((what) => `- ${what}`).join('\n'),
        ]
      : ['The study of these units lacks nothing: it gives every exhibit.']),
  ]
}

const linesListed = 60

function linesWords(lines: readonly string[], xUnit: string): string[] {
  const said = `Distances are in ${xUnit}, positive where treated. Lines are numbered; \`replication.json\` has their names under \`units.lines\``
  if (lines.length > linesListed) return [`${said}.`]
  return [`${said}:`, lines.map((line, i) => `${i + 1}. ${escapeMarkdown(line)}`).join('\n')]
}

function instructions({ hasInputs, units }: ReplicationFacts): string[] {
  const fromRecords = hasInputs
    ? 'runs the study from `inputs/`'
    : 'runs the study from `inputs/` once the files listed above are there (or from another folder with `--inputs FOLDER`)'
  const without = units
    ? 'Without the records it estimates again from `units/units.csv` and compares every number that these units give with `results/results.json`; where they do not give all of them, exhibits are drawn again from the published numbers.'
    : 'Without the records it draws every exhibit again from the numbers.'
  return [
    'In the folder above this one, with the folder of this file in place of FOLDER:',
    '```sh\nscarp rebuild FOLDER\n```',
    `This first checks the hash of every file; a file that changed is named. Then it ${fromRecords} and compares every exhibit, byte for byte. ${without} What it made is in \`FOLDER-rebuilt\`.`,
  ]
}

function licences({ hasInputs }: ReplicationFacts): string[] {
  return [
    [
      `- Data: ${author(`licence of each source${hasInputs ? ', which must allow them to be in this folder' : ''}; boundary files often ask for attribution or bar redistribution, and \`results/borders.geojson\`, the maps and \`drawn.json\` hold geometry that comes from them`)}`,
      `- This folder: ${author('licence of text and results')}`,
      '- scarp: MIT.',
    ].join('\n'),
  ]
}
