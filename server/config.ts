/** The only reader of the environment: one schema, every fault reported at once. */
import { join, resolve } from 'node:path'
import { z } from 'zod'

const mebibyte = 1024 * 1024

const Environment = z.object({
  DATABASE_URL: z.string().min(1, 'DATABASE_URL is missing: the launcher sets it, or name a PostgreSQL server'),
  PORT: z.coerce.number().int().min(0).max(65535).default(4100),
  HOST: z.string().default('127.0.0.1'),
  EVENBURN_DATA: z.string().default('.data'),
  SESSION_SECRET: z.string().min(32, 'SESSION_SECRET must be at least 32 characters; the launcher makes one'),
  SMTP_URL: z.string().optional(),
  MAIL_FROM: z.string().default('Evenburn <evenburn@localhost>'),
  PUBLIC_URL: z.string().optional(),
  EVENBURN_DEMO: z.enum(['0', '1']).default('0'),
  UPLOAD_MAX_MB: z.coerce.number().positive().default(512),
  QUOTA_MB: z.coerce.number().positive().default(20_480),
  TRY_LIMIT: z.coerce.number().int().positive().default(10),
  LOG_LEVEL: z.enum(['trace', 'debug', 'info', 'warn', 'error', 'silent']).default('info'),
})

export interface Config {
  readonly databaseUrl: string
  readonly port: number
  readonly host: string
  readonly dataDir: string
  readonly uploadDir: string
  readonly sessionSecret: Uint8Array
  readonly smtpUrl: string | null
  readonly mailFrom: string
  readonly publicUrl: string
  readonly demo: boolean
  /** Mails are caught and shown on a page: only in the demo, and only without a real mail server. */
  readonly demoMailbox: boolean
  readonly uploadMaxBytes: number
  readonly quotaBytes: number
  /** Failed tries per quarter of an hour before sign-in and resets answer 429. */
  readonly tryLimit: number
  readonly logLevel: string
}

/** @throws Error naming every variable that cannot be used. */
export function readConfig(env: Record<string, string | undefined>): Config {
  const parsed = Environment.safeParse(env)
  if (!parsed.success) {
    const faults = parsed.error.issues.map((issue) => `  ${issue.path.join('.')}: ${issue.message}`)
    throw new Error(`The configuration cannot be used:\n${faults.join('\n')}`)
  }
  const value = parsed.data
  const dataDir = resolve(value.EVENBURN_DATA)
  const demo = value.EVENBURN_DEMO === '1'
  return {
    databaseUrl: value.DATABASE_URL,
    port: value.PORT,
    host: value.HOST,
    dataDir,
    uploadDir: join(dataDir, 'uploads'),
    sessionSecret: new TextEncoder().encode(value.SESSION_SECRET),
    smtpUrl: value.SMTP_URL ?? null,
    mailFrom: value.MAIL_FROM,
    publicUrl: (value.PUBLIC_URL ?? `http://localhost:${value.PORT}`).replace(/\/$/, ''),
    demo,
    demoMailbox: demo && value.SMTP_URL === undefined,
    uploadMaxBytes: value.UPLOAD_MAX_MB * mebibyte,
    quotaBytes: value.QUOTA_MB * mebibyte,
    tryLimit: value.TRY_LIMIT,
    logLevel: value.LOG_LEVEL,
  }
}
