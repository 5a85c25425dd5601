/**
 * A results folder that is whole or absent.
 *
 * Everything is written to `.NAME-PID-RANDOM` beside the target NAME and flushed to the disk. Then the earlier
 * results are renamed to `.NAME-PID-RANDOM.earlier`, the new ones to NAME, and the earlier ones are deleted.
 * A process killed before the first rename leaves NAME as it was; one killed between the two leaves it whole under
 * the `.earlier` name, and the next run puts it back before it does anything else.
 */
import { randomBytes } from 'node:crypto'
import { existsSync, readdirSync, renameSync, rmSync } from 'node:fs'
import { mkdir, open, rm } from 'node:fs/promises'
import { basename, dirname, join, resolve } from 'node:path'
import { factsOf, realPath } from './outFolder.js'

/** Writes one file of the results; `path` is relative, with forward slashes. Parts are written one after another. */
export type WriteFile = (path: string, parts: Iterable<string | Uint8Array>) => Promise<void>

/** Puts what `fill` writes at `target`, in place of what is there. Fails as a whole or not at all. */
export async function writeResultsFolder(target: string, fill: (write: WriteFile) => Promise<void>): Promise<void> {
  const path = realPath(resolve(target))
  const parent = dirname(path)
  await mkdir(parent, { recursive: true })
  mendResultsFolder(target)
  const stage = join(parent, `.${basename(path)}-${process.pid}-${randomBytes(4).toString('hex')}`)
  const letGo = removeWhenStopped(stage)
  try {
    await mkdir(stage)
    const folders = new Set([stage])
    await fill(async (file, parts) => {
      const full = join(stage, file)
      if (!folders.has(dirname(full))) await mkdir(dirname(full), { recursive: true })
      folders.add(dirname(full))
      await writeFlushed(full, parts)
    })
    for (const folder of folders) await flushFolder(folder)
    exchange(stage, path)
    await flushFolder(parent)
  } catch (error) {
    await rm(stage, { recursive: true, force: true })
    throw error
  } finally {
    letGo()
  }
}

/** Takes up what earlier processes left beside `target` when they were killed: puts moved results back, deletes the rest. */
export function mendResultsFolder(target: string): void {
  const path = realPath(resolve(target))
  const parent = dirname(path)
  if (!factsOf(parent)?.isDirectory()) return
  const leftovers = readdirSync(parent).filter((name) => isLeftover(name, basename(path)))
  for (const name of leftovers.filter((leftover) => leftover.endsWith('.earlier'))) {
    if (existsSync(path)) rmSync(join(parent, name), { recursive: true, force: true })
    else renameSync(join(parent, name), path)
  }
  for (const name of leftovers.filter((leftover) => !leftover.endsWith('.earlier'))) {
    rmSync(join(parent, name), { recursive: true, force: true })
  }
}

/** A temporary folder of `target` whose process is gone. */
function isLeftover(name: string, target: string): boolean {
  if (!name.startsWith(`.${target}-`)) return false
  const match = /^(\d+)-[0-9a-f]{8}(?:\.earlier)?$/.exec(name.slice(target.length + 2))
  return match !== null && !isAlive(Number(match[1]))
}

function isAlive(pid: number): boolean {
  // This process has begun nothing yet: a folder with its number is from an earlier process of that number.
  if (pid === process.pid) return false
  try {
    process.kill(pid, 0)
    return true
  } catch (error) {
    return (error as { code?: string }).code === 'EPERM'
  }
}

/** Two renames, one straight after the other; the earlier results come back if the second fails. */
function exchange(stage: string, path: string): void {
  const aside = `${stage}.earlier`
  const hasEarlier = existsSync(path)
  if (hasEarlier) renameSync(path, aside)
  try {
    renameSync(stage, path)
  } catch (error) {
    if (hasEarlier) renameSync(aside, path)
    throw error
  }
  if (!hasEarlier) return
  // Under the temporary name it is known to be rubbish: a half-deleted folder is never put back.
  renameSync(aside, stage)
  rmSync(stage, { recursive: true, force: true })
}

async function writeFlushed(file: string, parts: Iterable<string | Uint8Array>): Promise<void> {
  const handle = await open(file, 'wx')
  try {
    for (const part of parts) await handle.writeFile(part)
    await handle.sync()
  } finally {
    await handle.close()
  }
}

async function flushFolder(folder: string): Promise<void> {
  const handle = await open(folder, 'r')
  try {
    await handle.sync()
  } finally {
    await handle.close()
  }
}

const stops = ['SIGINT', 'SIGTERM', 'SIGHUP'] as const

/** Until the returned function is called, a stop signal deletes `path` before the process dies of that signal. */
export function removeWhenStopped(path: string): () => void {
  const stop = (signal: NodeJS.Signals) => {
    letGo()
    rmSync(path, { recursive: true, force: true })
    process.kill(process.pid, signal)
  }
  const letGo = () => {
    for (const signal of stops) process.off(signal, stop)
  }
  for (const signal of stops) process.on(signal, stop)
  return letGo
}
