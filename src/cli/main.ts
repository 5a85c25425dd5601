#!/usr/bin/env node
/** The command line. Commands load their rooms when they are called, so that help and version come at once. */
import { Command, CommanderError, InvalidArgumentError, Option } from 'commander'
import { type ExitCode, exitCodes } from './exitCodes.js'
import { say, sayFault, sayProblems, systemProblem } from './say.js'
import { packageVersion } from './version.js'

process.exitCode = await main(process.argv.slice(2))

async function main(words: readonly string[]): Promise<ExitCode> {
  let code: ExitCode = exitCodes.done
  const program = commands((result) => {
    code = result
  })
  process.stdout.on('error', closedPipe)
  process.stderr.on('error', closedPipe)
  try {
    await program.parseAsync(words, { from: 'user' })
    return code
  } catch (error) {
    if (error instanceof CommanderError) return usage(error)
    const problem = systemProblem(error, 'scarp')
    if (problem !== undefined) {
      sayProblems([problem])
      return exitCodes.unusable
    }
    sayFault(error)
    return exitCodes.fault
  }
}

function commands(done: (code: ExitCode) => void): Command {
  const program = new Command('scarp')
    .description('Estimates what a rule that draws lines does: cutoffs on a score, borders on the ground.')
    .version(packageVersion(), '-V, --version', 'print the version')
    .helpOption('-h, --help', 'print this help')
    .helpCommand('help [command]', 'print the help of a command')
    .exitOverride()
    .configureOutput({ writeErr: () => {}, outputError: () => {} })
    .addHelpText(
      'after',
      '\nExit codes: 0 done, 1 a fault in the program, 2 the study, a table or a geometry can not be used, 3 nothing can be estimated.',
    )
  program
    .command('run')
    .description('the whole job: read, place, estimate, pool, compare, check, report')
    .argument('<study>', 'study file (YAML or JSON)')
    .option(
      '--out <folder>',
      'results folder (default: the name of the study, with -results, in the working directory)',
    )
    .option('--quiet', 'print nothing but problems')
    .option('--json', 'print results.json and nothing else')
    .addOption(workersOption())
    .action(async (study, options) => done(await (await import('./run.js')).run(study, options)))
  program
    .command('inspect')
    .description('everything that can be known to be wrong or doubtful before estimating')
    .argument('<study>', 'study file (YAML or JSON)')
    .addOption(workersOption())
    .action(async (study, options) => done(await (await import('./inspect.js')).inspect(study, options)))
  program
    .command('measure')
    .description('only the placement: zone, line, piece, signed distance and foot point of every unit')
    .argument('<records>', 'table or layer of units, with --zones; or a study file, which names both')
    .option('--zones <file>', 'zones (GeoJSON, TopoJSON, Shapefile, GeoPackage, KML, or a table with WKT)')
    .option('--position <lon,lat>', 'the columns of longitude and latitude (layers of points need none)')
    .option('--zone-name <property>', 'property with the name of a zone (default: name)')
    .option('--treated <names>', 'names of the treated zones, with commas between')
    .option('--dose <property>', 'numeric property of the zones, instead of --treated: the higher side is treated')
    .option('--unit <unit>', 'm, km, ft or mi (default: m)')
    .option('--runner-up', 'add the nearest border of another pair of zones, and how far it is')
    .option('--without-coordinates', 'leave out positions, foot points and places along the border; the distances stay')
    .requiredOption('--out <file>', 'table to write (.csv, .parquet or .geojson)')
    .addOption(workersOption())
    .action(async (records, options) => done(await (await import('./measure.js')).measure(records, options)))
  program
    .command('plan')
    .description('smallest detectable effects and units needed, by line and pooled, from pilot records or assumptions')
    .argument('<study>', 'study file; with plan.assume and no records, assumptions alone')
    .option('--json', 'print the plan as JSON, with power curves')
    .action(async (study, options) => done(await (await import('./plan.js')).plan(study, options)))
  program
    .command('replicate')
    .description('a folder from which others can make every exhibit again, with the records or without')
    .argument('<study>', 'study file (YAML or JSON)')
    .option('--out <folder>', 'replication folder (default: the name of the study, with -replication)')
    .option('--with-inputs', 'copy every file the study reads into it, as it is')
    .option('--without-units', 'leave out the units without coordinates and ids')
    .option('--quiet', 'print nothing but problems')
    .addOption(workersOption())
    .action(async (study, options) => done(await (await import('./replicate.js')).replicate(study, options)))
  program
    .command('rebuild')
    .description('every exhibit of a replication folder again, compared with what is in it')
    .argument('<folder>', 'replication folder')
    .option('--inputs <folder>', 'where the files are that the study reads (default: where they belong in the folder)')
    .option('--out <folder>', 'results folder (default: the name of the folder, with -rebuilt)')
    .option('--quiet', 'print nothing but problems')
    .addOption(workersOption())
    .action(async (folder, options) => done(await (await import('./rebuild.js')).rebuild(folder, options)))
  program
    .command('compare')
    .description('what differs between two results folders, and every number that moved')
    .argument('<first>', 'results folder')
    .argument('<second>', 'results folder')
    .option('--all', 'every number that moved, not the main ones alone')
    .option('--json', 'print the comparison as JSON')
    .action(async (first, second, options) =>
      done(await (await import('./compare.js')).compare(first, second, options)),
    )
  return program
}

/** The answers are the same whatever it is. */
function workersOption(): Option {
  return new Option(
    '--workers <number>',
    'threads that measure units on the ground (default: one for each core, at most 8, where units are many)',
  ).argParser((text) => {
    const workers = Number(text)
    if (!(Number.isInteger(workers) && workers >= 1 && workers <= 64))
      throw new InvalidArgumentError('Write a whole number from 1 to 64.')
    return workers
  })
}

/** Help and version end well; any other complaint of the parser is one line. */
function usage(error: CommanderError): ExitCode {
  if (error.exitCode === 0) return exitCodes.done
  const message = error.code === 'commander.help' ? 'no command given' : error.message
  say(`scarp: ${message.replace(/^error: /, '').replace(/\s*[\r\n]+\s*/g, ' ')}; scarp --help lists the commands`)
  return exitCodes.unusable
}

/** A reader such as `head` that has seen enough is no fault. */
function closedPipe(error: { code?: string }): void {
  if (error.code !== 'EPIPE') throw error
  process.exit()
}
