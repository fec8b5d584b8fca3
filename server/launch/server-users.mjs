/** Which launchers use the private database server; the last one out ends it, and a killed one no longer counts. */
import { existsSync, readFileSync, rmSync, writeFileSync } from 'node:fs'

const read = (path) => (existsSync(path) ? readFileSync(path, 'utf8').split('\n').map(Number).filter(Boolean) : [])
const alive = (pid) => existsSync(`/proc/${pid}`)
const write = (path, pids) => writeFileSync(path, pids.join('\n'), { mode: 0o600 })

/** Call both under the server's lock. A server that runs without any launcher on record was started by a person. */
export const wasStartedByLauncher = (path) => read(path).length > 0
export const signIn = (path) => write(path, [...read(path).filter(alive), process.pid])
export const forget = (path) => rmSync(path, { force: true })

/** @returns whether nobody is left. */
export function signOut(path) {
  const left = read(path).filter((pid) => pid !== process.pid && alive(pid))
  if (left.length > 0) write(path, left)
  else forget(path)
  return left.length === 0
}
