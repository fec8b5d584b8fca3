/** The one error class of use cases, and the one writer of application/problem+json (RFC 9457). */
import type { ErrorRequestHandler, Response } from 'express'
import multer from 'multer'
import { problemBase, problems, type ProblemBody, type ProblemSlug } from '../../../shared/problems.ts'
import type { Logger } from '../log.ts'

export interface ProblemFacts {
  readonly detail?: string
  readonly errors?: readonly { readonly detail: string; readonly pointer: string }[]
  /** Seconds after which trying again may work. */
  readonly retryAfterS?: number
}

/** An expected refusal. Its status and title come from the catalogue; the facts say how to put it right. */
export class Problem extends Error {
  readonly slug: ProblemSlug
  readonly facts: ProblemFacts
  constructor(slug: ProblemSlug, facts: ProblemFacts = {}) {
    super(facts.detail ?? problems[slug].title)
    this.slug = slug
    this.facts = facts
  }
}

export function writeProblem(res: Response, slug: ProblemSlug, facts: ProblemFacts = {}): void {
  const { status, title } = problems[slug]
  const body: ProblemBody = {
    type: problemBase + slug,
    title,
    status,
    ...(facts.detail === undefined ? {} : { detail: facts.detail }),
    ...(typeof res.req.id === 'string' ? { instance: `urn:uuid:${res.req.id}` } : {}),
    ...(facts.errors === undefined ? {} : { errors: [...facts.errors] }),
  }
  if (facts.retryAfterS !== undefined) res.setHeader('Retry-After', Math.ceil(facts.retryAfterS))
  res.status(status).type('application/problem+json').send(JSON.stringify(body))
}

interface BodyParserError {
  readonly type: string
}
const isBodyError = (error: unknown): error is BodyParserError =>
  typeof error === 'object' && error !== null && 'type' in error && typeof error.type === 'string'

export const problemWriter =
  (log: Logger): ErrorRequestHandler =>
  (error: unknown, _req, res, next) => {
    if (res.headersSent) {
      next(error)
      return
    }
    if (error instanceof Problem) writeProblem(res, error.slug, error.facts)
    else if (error instanceof multer.MulterError) {
      writeProblem(res, error.code === 'LIMIT_FILE_SIZE' ? 'file-too-large' : 'input-invalid', {
        detail: error.message,
      })
    } else if (isBodyError(error) && error.type === 'entity.parse.failed') writeProblem(res, 'body-unreadable')
    else if (isBodyError(error) && error.type === 'entity.too.large') writeProblem(res, 'file-too-large')
    else {
      log.error({ err: error, request: res.req.id }, 'unexpected')
      writeProblem(res, 'unexpected')
    }
  }
