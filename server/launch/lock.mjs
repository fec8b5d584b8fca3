/** A lock file, so that two starts do not make the same thing at once. */
import { closeSync, existsSync, openSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { sleep } from './commands.mjs'

/** Who holds the lock; a file younger than two seconds may not have its number yet. */
function holderOf(path) {
  try {
    if (Date.now() - statSync(path).mtimeMs < 2000) return 'busy'
    const pid = Number(readFileSync(path, 'utf8') || 0)
    return pid > 0 && existsSync(`/proc/${pid}`) ? 'busy' : 'gone'
  } catch {
    // It was released while we looked.
    return 'busy'
  }
}

/** Two starts at once: one does the work, the other waits. A lock left by a dead process is taken over. */
export async function withLock(path, work) {
  for (let tries = 0; ; tries += 1) {
    try {
      closeSync(openSync(path, 'wx', 0o600))
      writeFileSync(path, String(process.pid))
      break
    } catch (error) {
      if (error.code !== 'EEXIST') throw error
      const holder = holderOf(path)
      if (holder === 'gone') rmSync(path, { force: true })
      else if (tries > 240)
        throw new Error(`Another start has been busy for two minutes. If there is none, remove ${path}.`)
      await sleep(500)
    }
  }
  try {
    return await work()
  } finally {
    rmSync(path, { force: true })
  }
}
