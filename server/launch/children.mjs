/** The processes a start keeps alive: begun again when they die, ended together. */
import { spawn } from 'node:child_process'
import { sleep } from './commands.mjs'

const stopWithinMs = 10_000
const follow = ['--import', new URL('./follow-launcher.mjs', import.meta.url).href]

export function keepRunning(list, options) {
  const running = new Map()
  let stopping = false

  const begin = ({ name, args }, fails = 0) => {
    const began = Date.now()
    const child = spawn(process.execPath, [...follow, ...args], { ...options, stdio: ['ignore', 'inherit', 'inherit'] })
    running.set(name, child)
    child.on('exit', (code, signal) => {
      running.delete(name)
      if (stopping) return
      const again = Date.now() - began > 30_000 ? 0 : fails + 1
      const waitMs = Math.min(30_000, 500 * 2 ** again)
      console.error(`The ${name} process ended (${signal ?? `code ${code}`}); starting it again in ${waitMs / 1000} s.`)
      setTimeout(() => stopping || begin({ name, args }, again), waitMs)
    })
  }
  for (const each of list) begin(each)

  return {
    async stop() {
      stopping = true
      for (const child of running.values()) child.kill('SIGTERM')
      for (let waited = 0; running.size > 0 && waited < stopWithinMs; waited += 100) await sleep(100)
      for (const child of running.values()) child.kill('SIGKILL')
    },
  }
}

export async function waitUntilReady(url, withinMs = 60_000) {
  for (let waited = 0; waited < withinMs; waited += 200) {
    const ok = await fetch(url, { signal: AbortSignal.timeout(2000) }).then(
      (answer) => answer.ok,
      () => false,
    )
    if (ok) return
    await sleep(200)
  }
  throw new Error(`${url} did not answer within ${withinMs / 1000} s.`)
}
