/** Calls an endpoint value: builds the request, parses the answer by its schema, turns every failure into one ApiProblem. */
import type { Endpoint } from '../../shared/endpoint.ts'
import { ProblemBody } from '../../shared/problems.ts'

export class ApiProblem extends Error {
  readonly status: number
  readonly slug: string
  readonly errors: readonly { detail: string; pointer: string }[]
  constructor(
    status: number,
    slug: string,
    message: string,
    errors: readonly { detail: string; pointer: string }[] = [],
  ) {
    super(message)
    this.status = status
    this.slug = slug
    this.errors = errors
  }
}

export interface CallOptions<Params, Query, Body> {
  readonly params?: Params
  readonly query?: Query
  readonly body?: Body
  readonly file?: File
  /** Share of the upload that has left, 0 to 1. */
  readonly onProgress?: (share: number) => void
  readonly signal?: AbortSignal
}

function addressOf(path: string, params: unknown, query: unknown): string {
  const filled = path.replace(/:(\w+)/g, (_, name: string) =>
    encodeURIComponent(String((params as Record<string, unknown>)[name])),
  )
  const search = new URLSearchParams()
  for (const [name, value] of Object.entries(query ?? {})) if (value !== undefined) search.set(name, String(value))
  const text = search.toString()
  return text === '' ? filled : `${filled}?${text}`
}

function problemOf(status: number, body: unknown): ApiProblem {
  const parsed = ProblemBody.safeParse(body)
  if (!parsed.success)
    return new ApiProblem(status, 'unexpected', 'The server answered in a way this page does not understand.')
  const { type, title, detail, errors } = parsed.data
  return new ApiProblem(status, type.split('/').at(-1) ?? 'unexpected', detail ? `${title}. ${detail}` : title, errors)
}

const noConnection = () =>
  new ApiProblem(0, 'no-connection', 'No connection to the server. What you typed is kept; try again when it returns.')

async function send(
  address: string,
  method: string,
  body: unknown,
  signal: AbortSignal | undefined,
): Promise<{ status: number; body: unknown }> {
  let answer: Response
  try {
    answer = await fetch(address, {
      method,
      credentials: 'same-origin',
      ...(body === undefined ? {} : { headers: { 'Content-Type': 'application/json' }, body: JSON.stringify(body) }),
      ...(signal ? { signal } : {}),
    })
  } catch (error) {
    if (error instanceof DOMException && error.name === 'AbortError') throw error
    throw noConnection()
  }
  return { status: answer.status, body: (await answer.json().catch(() => null)) as unknown }
}

/** fetch tells nothing of an upload's progress, so files go by XMLHttpRequest. */
function upload(
  address: string,
  fields: Record<string, string | undefined>,
  file: File,
  onProgress: ((share: number) => void) | undefined,
  signal: AbortSignal | undefined,
): Promise<{ status: number; body: unknown }> {
  return new Promise((resolve, reject) => {
    const form = new FormData()
    for (const [name, value] of Object.entries(fields)) if (value !== undefined) form.set(name, value)
    form.set('file', file)
    const request = new XMLHttpRequest()
    request.open('POST', address)
    request.responseType = 'json'
    request.upload.onprogress = (event) => onProgress?.(event.loaded / event.total)
    request.onload = () => resolve({ status: request.status, body: request.response as unknown })
    request.onerror = () => reject(noConnection())
    request.onabort = () => reject(new DOMException('cancelled', 'AbortError'))
    signal?.addEventListener('abort', () => request.abort())
    request.send(form)
  })
}

/** @throws ApiProblem for every refusal, no connection included. */
export async function call<Params, Query, Body, Result>(
  endpoint: Endpoint<Params, Query, Body, Result>,
  options: CallOptions<Params, Partial<Query>, Body> = {},
): Promise<Result> {
  const address = addressOf(endpoint.path, options.params, options.query)
  const answer = options.file
    ? await upload(
        address,
        (options.body ?? {}) as Record<string, string | undefined>,
        options.file,
        options.onProgress,
        options.signal,
      )
    : await send(address, endpoint.method, options.body, options.signal)
  if (answer.status < 200 || answer.status > 299) throw problemOf(answer.status, answer.body)
  if (!endpoint.response) return undefined as Result
  const parsed = endpoint.response.safeParse(answer.body)
  if (parsed.success) return parsed.data
  throw new ApiProblem(
    answer.status,
    'unexpected',
    'The server’s answer does not have the agreed form. Load the page again.',
  )
}
