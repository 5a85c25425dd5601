/**
 * Placing beside GEOS, in one run: the same million points and hundred thousand edges, each program a process of its
 * own, start-up and reading of the same files included, turn about. GEOS, driven from C, answers in planar degrees: the
 * nearest edge and the zone. Scarp answers on the ellipsoid, with foot, distance and position along the border.
 * Shapely's loop in Python is timed on a part of the points beside it.
 */
import { spawnSync } from 'node:child_process'
import { existsSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { type JaggedMap, jaggedMap, scatteredPoints } from './distance.js'

const here = import.meta.dirname
const ours = join(here, 'placeOnce.mjs')
const debianPython = '/usr/bin/python3'
const shapelyPoints = 10_000

/** The most that one and two threads may take, as a share of GEOS. */
const most: Readonly<Record<number, number>> = { 1: 0.35, 2: 0.15 }

export function benchGeos(points = 1e6, rounds = 3): void {
  if (!existsSync(join(here, '../../dist/cli/ground.js'))) {
    console.log('Beside GEOS: not run, dist/ is missing: npm run build')
    return
  }
  const folder = mkdtempSync(join(tmpdir(), 'bench-'))
  try {
    writeInputs(folder, jaggedMap(39, 5, 1), points)
    const geos = compiled(folder)
    const seconds: Record<string, number[]> = { geos: [], 1: [], 2: [] }
    const said: Record<string, string> = {}
    const run = (name: string, program: string, words: string[]) => {
      const started = performance.now()
      said[name] = output(program, words)
      seconds[name].push((performance.now() - started) / 1000)
    }
    for (let round = 0; round < rounds; round++) {
      if (geos) run('geos', geos, [folder])
      for (const workers of ['1', '2']) run(workers, process.execPath, [ours, folder, workers])
    }
    console.log(`Beside GEOS: ${points} points, whole processes, wall seconds, middle of ${rounds}`)
    if (said[1] !== said[2]) throw new Error(`one thread says ${said[1]}, two say ${said[2]}`)
    if (geos)
      console.log(`  GEOS in C  ${middle(seconds.geos).toFixed(2)}   units in a zone: ${said.geos.split(' ')[0]}`)
    for (const workers of [1, 2]) {
      const own = middle(seconds[workers])
      const ratio = own / middle(seconds.geos)
      const beside = geos ? `   ratio ${ratio.toFixed(3)}, at most ${most[workers]}` : ''
      console.log(`  ${workers} thread${workers === 1 ? ' ' : 's'}  ${own.toFixed(2)}${beside}`)
    }
    console.log(`  units in a zone: ${said[1].split(' ')[0]}`)
    timeShapely(folder, middle(seconds[1]) / points)
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

function writeInputs(folder: string, map: JaggedMap, count: number): void {
  const { lon, lat } = scatteredPoints(map, count, 2)
  const { lon0, lat0, lon1, lat1 } = map.edges
  const interleaved = (columns: Float64Array[]) => {
    const numbers = new Float64Array(columns.length * columns[0].length)
    columns.forEach((column, at) => {
      for (let i = 0; i < column.length; i++) numbers[columns.length * i + at] = column[i]
    })
    return numbers
  }
  writeFileSync(join(folder, 'points.bin'), interleaved([lon, lat]))
  writeFileSync(join(folder, 'edges.bin'), interleaved([lon0, lat0, lon1, lat1]))
  const rings = map.zones.flatMap(([[ring]]) => [ring.length, ...ring.flat()])
  writeFileSync(join(folder, 'zones.bin'), Float64Array.from(rings))
}

/** The program in C; undefined where the machine lacks what it needs, which is said. */
function compiled(folder: string): string | undefined {
  const library = /=> (\S*libgeos_c\.so\.1)/.exec(
    spawnSync('/sbin/ldconfig', ['-p'], { encoding: 'utf8' }).stdout ?? '',
  )
  const program = join(folder, 'geos')
  const words = ['-O2', '-o', program, join(here, 'geos.c'), library?.[1] ?? '']
  if (library && spawnSync('gcc', words, { stdio: 'ignore' }).status === 0) return program
  console.log('Beside GEOS: no ratio, gcc or GEOS is missing: apt-get install gcc libc6-dev libgeos-c1v5')
  return undefined
}

function timeShapely(folder: string, ownSeconds: number): void {
  const words = [join(here, 'geos.py'), folder, `${shapelyPoints}`]
  const { status, stdout } = spawnSync(debianPython, words, { encoding: 'utf8' })
  if (status !== 0) {
    console.log('  shapely: not run, it is missing: apt-get install python3-shapely')
    return
  }
  const [trees, each] = stdout.split(' ').map(Number)
  const times = `${trees.toFixed(1)} s for the trees, ${(each * 1e6).toFixed(1)} µs for each of ${shapelyPoints} points`
  console.log(`  shapely's loop: ${times}; one thread takes ${(ownSeconds / each).toFixed(4)} of that, all included`)
}

function output(program: string, words: readonly string[]): string {
  const { status, stdout, stderr } = spawnSync(program, words, { encoding: 'utf8' })
  if (status !== 0) throw new Error(`${program} ended with ${status}: ${stderr}`)
  return stdout.trim()
}

function middle(values: readonly number[]): number {
  return [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)]
}
