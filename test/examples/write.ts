/** Writes the generated files of the example studies into boundaries/. */
import { mkdirSync, writeFileSync } from 'node:fs'
import { dirname } from 'node:path'
import { fileURLToPath } from 'node:url'
import { exampleFiles } from './files.js'

for (const [path, text] of Object.entries(exampleFiles())) {
  const file = fileURLToPath(new URL(`../../boundaries/${path}`, import.meta.url))
  mkdirSync(dirname(file), { recursive: true })
  writeFileSync(file, text)
  process.stdout.write(`boundaries/${path} ${(text.length / 1024).toFixed(0)} KB\n`)
}
