/** The real app on a free port with a database of its own, and people who call it with real sessions and tokens. */
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { buildApp } from '../../server/app.ts'
import { readConfig } from '../../server/config.ts'
import { buildDeps, closeDeps, type Deps } from '../../server/deps.ts'
import { addPerson, foundWorkshop, startSession } from '../../server/features/accounts/service.ts'
import { createToken } from '../../server/features/accounts/members.ts'
import { jobs } from '../../server/jobs.ts'
import { drainQueue } from '../../server/platform/queue/run.ts'
import { SignJWT } from 'jose'
import type { Role } from '../../shared/access.ts'
import type { Endpoint } from '../../shared/endpoint.ts'
import { ProblemBody } from '../../shared/problems.ts'
import { cloneDatabase, testEnvironment } from './database.ts'

export interface Answer<Result> {
  readonly status: number
  readonly body: Result
  readonly problem: ProblemBody | null
  readonly text: string
  readonly headers: Headers
}

export interface CallInput<Params, Query, Body> {
  readonly params?: Params
  readonly query?: Partial<Query>
  readonly body?: Body
  readonly file?: { readonly name: string; readonly content: string }
  readonly headers?: Record<string, string>
}

export interface Person {
  readonly id: string
  readonly name: string
  readonly email: string
  readonly headers: Record<string, string>
  readonly call: <P, Q, B, R>(endpoint: Endpoint<P, Q, B, R>, input?: CallInput<P, Q, B>) => Promise<Answer<R>>
}

export interface TestServer {
  readonly url: string
  readonly deps: Deps
  readonly caller: (headers: Record<string, string>) => Person['call']
  readonly drain: () => Promise<void>
  readonly close: () => Promise<void>
}

/** Sends what the endpoint describes and parses the answer by its schema: the contract is tested with every call. */
function callerOf(url: string, headers: Record<string, string>): Person['call'] {
  return async (endpoint, input = {}) => {
    const path = endpoint.path.replace(/:(\w+)/g, (_, name: string) =>
      encodeURIComponent(String((input.params as Record<string, unknown>)[name])),
    )
    const search = new URLSearchParams(Object.entries(input.query ?? {}).map(([name, value]) => [name, String(value)]))
    let body: BodyInit | null = null
    const sent: Record<string, string> = { ...headers, ...input.headers }
    if (endpoint.bodyKind === 'upload') {
      const form = new FormData()
      for (const [name, value] of Object.entries(input.body ?? {})) form.set(name, String(value))
      if (input.file) form.set('file', new File([input.file.content], input.file.name))
      body = form
    } else if (input.body !== undefined) {
      body = JSON.stringify(input.body)
      sent['Content-Type'] = 'application/json'
    }
    const answer = await fetch(`${url}${path}?${search}`, { method: endpoint.method, headers: sent, body })
    const text = await answer.text()
    const json = answer.headers.get('content-type')?.includes('json') ? (JSON.parse(text) as unknown) : null
    const ok = answer.status < 300
    return {
      status: answer.status,
      text,
      headers: answer.headers,
      problem: ok ? null : ProblemBody.parse(json),
      body: (ok && endpoint.response ? endpoint.response.parse(json) : undefined) as never,
    }
  }
}

export async function startServer(extra: Record<string, string> = {}): Promise<TestServer> {
  const database = await cloneDatabase()
  const deps = buildDeps(readConfig({ ...testEnvironment(database.url), ...extra }))
  const server = createServer(buildApp(deps, null))
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const url = `http://127.0.0.1:${(server.address() as AddressInfo).port}`
  return {
    url,
    deps,
    caller: (headers) => callerOf(url, headers),
    drain: () => drainQueue(deps, jobs),
    async close() {
      await new Promise((resolve) => server.close(resolve))
      await closeDeps(deps)
      await database.drop()
    },
  }
}

export const password = 'a long enough password'
let hashed: Promise<string> | null = null

async function cookieOf(server: TestServer, personId: string, workshopId: string): Promise<Record<string, string>> {
  const { sessionId } = await server.deps.db.transaction((tx) => startSession(server.deps, tx, personId, workshopId))
  const token = await new SignJWT({})
    .setProtectedHeader({ alg: 'HS256' })
    .setSubject(sessionId)
    .setExpirationTime('1h')
    .sign(server.deps.config.sessionSecret)
  return { cookie: `evenburn_session=${token}` }
}

export interface Crew {
  readonly workshopId: string
  readonly tuner: Person
  readonly owner: Person
  readonly reviewer: Person
  readonly admin: Person
}

/** A workshop with one person for each role, all signed in. */
export async function aWorkshop(server: TestServer, name: string, allowOwnSignOff = false): Promise<Crew> {
  const { deps } = server
  hashed ??= deps.crunch.hashPassword(password)
  const passwordHash = await hashed
  const mail = (role: string) => `${role}@${name}.example`
  const made = await deps.db.transaction(async (tx) => {
    const { workshopId, personId } = await foundWorkshop(
      tx,
      name,
      { name: `Admin of ${name}`, email: mail('admin'), passwordHash },
      ['admin'],
      allowOwnSignOff,
    )
    const ids: Record<string, string> = { admin: personId }
    for (const role of ['tuner', 'owner', 'reviewer'] satisfies Role[]) {
      ids[role] = await addPerson(tx, workshopId, { name: `${role} of ${name}`, email: mail(role), passwordHash }, [
        role,
      ])
    }
    return { workshopId, ids }
  })
  const person = async (role: string): Promise<Person> => {
    const headers = await cookieOf(server, made.ids[role]!, made.workshopId)
    const title = role === 'admin' ? `Admin of ${name}` : `${role} of ${name}`
    return { id: made.ids[role]!, name: title, email: mail(role), headers, call: server.caller(headers) }
  }
  return {
    workshopId: made.workshopId,
    tuner: await person('tuner'),
    owner: await person('owner'),
    reviewer: await person('reviewer'),
    admin: await person('admin'),
  }
}

/** The same person speaking through an access token of one role. */
export async function withToken(server: TestServer, crew: Crew, person: Person, role: Role): Promise<Person> {
  const actor = {
    personId: person.id,
    name: person.name,
    email: person.email,
    workshopId: crew.workshopId,
    roles: [role],
    sessionId: 'test',
  }
  const { secret } = await createToken(server.deps, actor, { label: 'test', role })
  const headers = { authorization: `Bearer ${secret}` }
  return { ...person, headers, call: server.caller(headers) }
}
