/** Lets a worker thread load TypeScript: under Node 20 a thread does not take the process's loader over. */
import { register } from 'tsx/esm/api'

register()
const work = await import('./thread.ts')
export const {
  hashPassword,
  checkPassword,
  readLogFile,
  rememberDrive,
  relineariseDrive,
  addUpLogs,
  replayDrive,
  samplesOfCell,
  inspectLog,
} = work
