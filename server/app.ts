/** Builds the Express app from its dependencies; never listens. */
import { randomUUID } from 'node:crypto'
import { existsSync } from 'node:fs'
import { resolve } from 'node:path'
import compression from 'compression'
import express, { Router, type Express } from 'express'
import helmet from 'helmet'
import { pinoHttp } from 'pino-http'
import type { Deps } from './deps.ts'
import { mountAccounts } from './features/accounts/routes.ts'
import { identify } from './features/accounts/identify.ts'
import { mountExports } from './features/exports/routes.ts'
import { mountLogs } from './features/logs/routes.ts'
import { mountNotices } from './features/notices/routes.ts'
import { mountProposals } from './features/proposals/routes.ts'
import { mountReviews } from './features/reviews/routes.ts'
import { mountTables } from './features/tables/routes.ts'
import { mountVehicles } from './features/vehicles/routes.ts'
import type { Binder } from './platform/http/on.ts'
import { openApiDocument } from './platform/http/openapi.ts'
import { sameOrigin } from './platform/http/origin.ts'
import { problemWriter, writeProblem } from './platform/http/problem.ts'

export function buildApp(deps: Deps, siteDir: string | null): Express {
  const { config } = deps
  const app = express()
  app.disable('x-powered-by')
  app.use(
    helmet({
      contentSecurityPolicy: {
        directives: {
          defaultSrc: ["'self'"],
          scriptSrc: ["'self'"],
          // Radix and React set style attributes; scripts stay strict.
          styleSrc: ["'self'", "'unsafe-inline'"],
          imgSrc: ["'self'", 'data:'],
          objectSrc: ["'none'"],
          frameAncestors: ["'none'"],
          upgradeInsecureRequests: config.publicUrl.startsWith('https:') ? [] : null,
        },
      },
      strictTransportSecurity: config.publicUrl.startsWith('https:'),
    }),
  )
  app.use(
    pinoHttp({
      logger: deps.log,
      genReqId: () => randomUUID(),
      customLogLevel: (_req, res, error) => (error || res.statusCode >= 500 ? 'error' : 'debug'),
      serializers: {
        req: (req: { id: string; method: string; url: string }) => ({
          id: req.id,
          method: req.method,
          path: loggedPath(req.url),
        }),
        res: (res: { statusCode: number }) => ({ status: res.statusCode }),
      },
    }),
  )
  app.get('/api/health', async (_req, res) => {
    await deps.pool.query('select 1')
    res.json({ ok: true })
  })
  app.get('/api/openapi.json', (_req, res) => {
    res.json(openApiDocument(config.publicUrl))
  })
  app.use('/api', sameOrigin(config.publicUrl), express.json({ limit: '1mb' }))
  const router = Router()
  const binder: Binder = {
    router,
    uploadDir: config.uploadDir,
    uploadMaxBytes: config.uploadMaxBytes,
    identify: (req) => identify(deps, req),
  }
  mountAccounts(binder, deps)
  mountVehicles(binder, deps)
  mountNotices(binder, deps)
  mountTables(binder, deps)
  mountLogs(binder, deps)
  mountProposals(binder, deps)
  mountReviews(binder, deps)
  mountExports(binder, deps)
  app.use(router)
  app.use('/api', (_req, res) => writeProblem(res, 'no-such-address'))
  if (siteDir && existsSync(siteDir)) serveSite(app, resolve(siteDir))
  app.use(problemWriter(deps.log))
  return app
}

/** Links from mails carry their secret in the path; a log must not. */
const loggedPath = (url: string): string =>
  (url.split('?')[0] ?? '').replace(/\/(password-resets|invitation-links|reset|invitation)\/[^/]+/, '/$1/…')

/**
 * The built client: hashed assets for ever, the page for every other address. Only these are compressed: in an answer
 * that holds a secret beside what a stranger wrote, the size would tell of it.
 */
function serveSite(app: Express, root: string): void {
  app.use(
    '/assets',
    compression(),
    express.static(resolve(root, 'assets'), { immutable: true, maxAge: '1y', fallthrough: false }),
  )
  app.use(express.static(root, { index: false, maxAge: '5m' }))
  app.get(['/', '/*path'], (_req, res) => {
    res.setHeader('Cache-Control', 'no-cache')
    res.sendFile('index.html', { root })
  })
}
