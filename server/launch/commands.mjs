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

/** Runs to the end with its output shown; resolves with its exit code. */
export function runShown(command, args, options = {}) {
  return new Promise((resolve, reject) => {
    const child = spawn(command, args, { stdio: 'inherit', ...options })
    child.on('error', reject)
    child.on('exit', (code, signal) => resolve(signal ? 1 : (code ?? 1)))
  })
}

export const sleep = (ms) => new Promise((resolve) => setTimeout(resolve, ms))
