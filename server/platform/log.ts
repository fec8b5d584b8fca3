/** The process's log: lines of JSON, with everything secret left out. */
import { pino, type Logger } from 'pino'

export type { Logger }
export const openLog = (level: string): Logger =>
  pino({ level, redact: ['req.headers.cookie', 'req.headers.authorization', '*.password', '*.token', '*.secret'] })
