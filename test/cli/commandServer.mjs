/**
 * Runs the built command again and again in one process: modules stay loaded and warm. Each message is a command line with its
 * working directory; the answer is what a process of its own would have said.
 */
const main = new URL('../../dist/cli/main.js', import.meta.url).href
let count = 0

process.on('message', async ({ words, cwd }) => {
  process.chdir(cwd)
  process.argv = [process.execPath, main, ...words]
  process.exitCode = undefined
  const said = { stdout: '', stderr: '' }
  const own = { stdout: process.stdout.write, stderr: process.stderr.write }
  for (const name of ['stdout', 'stderr']) {
    process[name].removeAllListeners('error')
    process[name].write = (text) => {
      said[name] += text
      return true
    }
  }
  try {
    await import(`${main}?${count++}`)
  } finally {
    Object.assign(process.stdout, { write: own.stdout })
    Object.assign(process.stderr, { write: own.stderr })
  }
  process.send({ code: process.exitCode ?? 0, ...said })
})
