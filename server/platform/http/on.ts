/** Binds an endpoint value to a handler: access first, then strict parsing, then the use case. */
import { unlink } from 'node:fs/promises'
import { pipeline } from 'node:stream/promises'
import type { Readable } from 'node:stream'
import type { Request, RequestHandler, Response, Router } from 'express'
import multer from 'multer'
import type { z } from 'zod'
import { can } from '../../../shared/access.ts'
import type { Endpoint } from '../../../shared/endpoint.ts'
import type { Actor } from './actor.ts'
import { Problem } from './problem.ts'

export interface UploadedFile {
  readonly name: string
  readonly path: string
  readonly bytes: number
}

export interface FileAnswer {
  readonly file: { readonly name: string; readonly type: string; readonly body: Uint8Array | Readable }
}

export interface Call<Params, Query, Body, A> {
  readonly actor: A
  readonly params: Params
  readonly query: Query
  readonly body: Body
  readonly file: UploadedFile | null
  readonly req: Request
  readonly res: Response
}

export interface Binder {
  readonly router: Router
  readonly uploadDir: string
  readonly uploadMaxBytes: number
  /** Who speaks, or null; throws where a credential is forged or expired. */
  readonly identify: (req: Request) => Promise<Actor | null>
}

function parse<T>(schema: z.ZodType<T> | undefined, value: unknown, part: string): T {
  if (!schema) return undefined as T
  const parsed = schema.safeParse(value)
  if (parsed.success) return parsed.data
  throw new Problem('input-invalid', {
    detail: parsed.error.issues[0]?.message,
    errors: parsed.error.issues.map((issue) => ({
      detail: issue.message,
      pointer: `#${part}/${issue.path.map(String).join('/')}`,
    })),
  })
}

function uploader(binder: Binder): RequestHandler {
  return multer({
    dest: binder.uploadDir,
    defParamCharset: 'utf8',
    limits: { fileSize: binder.uploadMaxBytes, files: 1, fields: 20, fieldSize: 10_000 },
  }).single('file')
}

/** Attachment names are ours: no path, no quotes, no line ends reach the header. */
const disposition = (name: string): string =>
  `attachment; filename="${name.replace(/[^\w.-]+/g, '-')}"; filename*=UTF-8''${encodeURIComponent(name)}`

/** Access `public` calls have no actor; every other call has one. */
export function on<Params, Query, Body, Result>(binder: Binder, endpoint: Endpoint<Params, Query, Body, Result>) {
  return (handler: (call: Call<Params, Query, Body, Actor>) => Promise<Result | FileAnswer>): void => {
    const handle: RequestHandler = async (req, res) => {
      const file = req.file ? { name: req.file.originalname, path: req.file.path, bytes: req.file.size } : null
      try {
        const answer = await handler({
          // A public handler does not read it; the guard below has filled it for everybody else.
          actor: res.locals['actor'] as Actor,
          params: parse(endpoint.params, req.params, 'params'),
          query: parse(endpoint.query, req.query, 'query'),
          body: parse(endpoint.body, (req.body as unknown) ?? {}, ''),
          file,
          req,
          res,
        })
        if (endpoint.response) res.json(answer)
        else await sendFile(res, (answer as FileAnswer).file)
      } finally {
        if (file) await unlink(file.path).catch(() => undefined)
      }
    }
    const guard: RequestHandler = async (req, res, next) => {
      res.setHeader('Cache-Control', 'no-store')
      if (endpoint.access !== 'public') {
        const actor = await binder.identify(req)
        if (!actor) throw new Problem('not-signed-in')
        if (endpoint.access !== 'signed-in' && !can(actor.roles, endpoint.access)) throw new Problem('not-allowed')
        res.locals['actor'] = actor
      }
      next()
    }
    const handlers = endpoint.bodyKind === 'upload' ? [guard, uploader(binder), handle] : [guard, handle]
    const method = endpoint.method.toLowerCase() as 'get' | 'post' | 'put' | 'patch' | 'delete'
    binder.router[method](endpoint.path, ...handlers)
  }
}

async function sendFile(res: Response, file: FileAnswer['file']): Promise<void> {
  res.setHeader('Content-Type', file.type)
  res.setHeader('Content-Disposition', disposition(file.name))
  if (file.body instanceof Uint8Array) res.send(Buffer.from(file.body))
  else await pipeline(file.body, res)
}
