/** The process's log: lines of JSON, with everything secret left out. */
import { pino, type Logger } from 'pino'

export type { Logger }

interface LoggedError {
  readonly type: string
  readonly message: string
  readonly code?: string
  readonly stack?: string
  readonly cause?: LoggedError
}

/** What a log says of an error. A driver hangs its whole client on one, with the key that cancels its queries, so only these go. */
export function describeError(error: unknown): LoggedError {
  if (!(error instanceof Error)) return { type: typeof error, message: String(error) }
  const code = 'code' in error && typeof error.code === 'string' ? error.code : undefined
  return {
    type: error.name,
    message: error.message,
    ...(code === undefined ? {} : { code }),
    ...(error.stack === undefined ? {} : { stack: error.stack }),
    ...(error.cause === undefined ? {} : { cause: describeError(error.cause) }),
  }
}

export const openLog = (level: string): Logger =>
  pino({
    level,
    serializers: { err: describeError },
    redact: ['req.headers.cookie', 'req.headers.authorization', '*.password', '*.token', '*.secret'],
  })
