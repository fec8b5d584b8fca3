/** Running other programs from the launcher: to the end, or until told to stop. Node's own modules only. */
import { spawn, spawnSync } from 'node:child_process'

export const isRoot = process.getuid?.() === 0

/** Runs to the end; throws with the program's last words when it fails. */
export function runQuietly(command, args, options = {}) {
  const done = spawnSync(command, args, { encoding: 'utf8', ...options })
  if (done.status === 0) return done.stdout
  const words = `${done.stdout ?? ''}${done.stderr ?? ''}`.trim().split('\n').slice(-12).join('\n')
  throw new Error(`${command} ${args.join(' ')} failed${done.error ? `: ${done.error.message}` : ''}\n${words}`)
}

export const succeeds = (command, args, options = {}) =>
  spawnSync(command, args, { stdio: 'ignore', ...options }).status === 0

const shown = new Set()
let ending = false

/** Ends what `runShown` has begun, waits for it, and lets it begin nothing more. */
export async function endPrograms() {
  ending = true
  for (const child of shown) child.kill('SIGTERM')
  for (let waited = 0; shown.size > 0 && waited < 5000; waited += 100) await sleep(100)
}

/** Runs to the end with its output shown; resolves with its exit code. */
export function runShown(command, args, options = {}) {
  if (ending) return Promise.reject(new Error('Interrupted.'))
  return new Promise((resolve, reject) => {
    const child = spawn(command, args, { stdio: 'inherit', ...options })
    shown.add(child)
    child.on('error', (error) => {
      shown.delete(child)
      reject(error)
    })
    child.on('exit', (code, signal) => {
      shown.delete(child)
      resolve(signal ? 1 : (code ?? 1))
    })
  })
}

export const sleep = (ms) => new Promise((resolve) => setTimeout(resolve, ms))
