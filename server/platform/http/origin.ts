/** Refuses changes that another site's page asks for in a signed-in person's browser. */
import type { RequestHandler } from 'express'
import { writeProblem } from './problem.ts'

const safe = new Set(['GET', 'HEAD', 'OPTIONS'])

/** A token in the Authorization header cannot be sent by a stranger's page, so only cookies are checked. */
export const sameOrigin =
  (publicUrl: string): RequestHandler =>
  (req, res, next) => {
    if (safe.has(req.method) || req.headers.authorization !== undefined) {
      next()
      return
    }
    const site = req.headers['sec-fetch-site']
    const { origin } = req.headers
    const own = [new URL(publicUrl).host, req.headers.host]
    const foreign =
      (site !== undefined && site !== 'same-origin' && site !== 'none') ||
      (origin !== undefined && !own.includes(URL.canParse(origin) ? new URL(origin).host : origin))
    if (foreign) writeProblem(res, 'wrong-origin')
    else next()
  }
