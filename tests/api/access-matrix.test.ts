/** One loop over every endpoint there is: who may call it, who may not, and that strangers find nothing. */
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { can, permissionsOf, roles, type Role } from '../../shared/access.ts'
import { allEndpoints } from '../../shared/contract/all.ts'
import { addComment, submitRevision } from '../../shared/contract/reviews.ts'
import { requestProposal } from '../../shared/contract/proposals.ts'
import type { AnyEndpoint } from '../../shared/endpoint.ts'
import { aWorkshop, startServer, withToken, type Crew, type Person, type TestServer } from '../support/server.ts'
import { aVehicle } from '../support/vehicle.ts'

let server: TestServer
let home: Crew
let away: Crew
let ids: Record<string, string>

beforeAll(async () => {
  server = await startServer()
  home = await aWorkshop(server, 'home')
  away = await aWorkshop(server, 'away')
  const { vehicle, ve, log } = await aVehicle(server, home, { log: true })
  await home.tuner.call(submitRevision, { params: { revisionId: ve.id }, body: { note: '' } })
  const comment = await home.tuner.call(addComment, {
    params: { revisionId: ve.id },
    body: { cell: null, text: 'a word' },
  })
  const proposal = await home.tuner.call(requestProposal, {
    params: { vehicleId: vehicle.id },
    body: { logIds: [log!.id], stepCapPct: 20 },
  })
  const nobody = '00000000-0000-4000-8000-000000000000'
  ids = {
    cell: '0',
    vehicleId: vehicle.id,
    revisionId: ve.id,
    logId: log!.id,
    proposalId: proposal.body.id,
    commentId: comment.body.id,
    personId: nobody,
    invitationId: nobody,
    tokenId: nobody,
    token: 'x'.repeat(40),
  }
})
afterAll(() => server.close())

const named = allEndpoints.map((each) => [`${each.endpoint.method} ${each.endpoint.path}`, each.endpoint] as const)
// Ending a session would end the caller's for the rest of the loop; its own tests cover it.
const ending = new Set(['/api/session', '/api/sessions'])
const guarded = named.filter(
  ([, { access, path, method }]) => access !== 'public' && !(method === 'DELETE' && ending.has(path)),
)
const scoped = guarded.filter(([, { path }]) => /:(vehicleId|revisionId|logId|proposalId|commentId)/.test(path))

/** A body that no schema takes: access must be decided before it is looked at, and nothing is changed by the loop. */
const unusable = { 'not-a-field': true }

const send = (call: Person['call'], endpoint: AnyEndpoint, body: unknown = unusable) =>
  call(endpoint, { params: ids, ...(endpoint.method === 'GET' || endpoint.method === 'DELETE' ? {} : { body }) })

describe('without a session', () => {
  test.each(guarded)('%s answers 401', async (_, endpoint) => {
    const answer = await send(server.caller({}), endpoint)
    expect(answer.status).toBe(401)
    expect(answer.problem?.type).toMatch(/not-signed-in$/)
  })

  test.each(guarded)('%s answers 401 to a forged cookie and a made-up token', async (_, endpoint) => {
    expect((await send(server.caller({ cookie: 'evenburn_session=eyJhbGciOiJub25lIn0.e30.' }), endpoint)).status).toBe(
      401,
    )
    expect((await send(server.caller({ authorization: `Bearer evb_${'x'.repeat(43)}` }), endpoint)).status).toBe(401)
  })
})

describe.each(roles)('as %s', (role) => {
  const refused = guarded.filter(([, { access }]) => access !== 'signed-in' && !can([role], access as never))
  const allowed = guarded.filter(
    ([, { access, method }]) => method === 'GET' && (access === 'signed-in' || can([role], access as never)),
  )

  test.runIf(refused.length > 0).each(refused)('%s answers 403, by session and by token', async (_, endpoint) => {
    const person = home[role as keyof Omit<Crew, 'workshopId'>]
    expect((await send(person.call, endpoint)).status).toBe(403)
    const token = await withToken(server, home, person, role as Role)
    expect((await send(token.call, endpoint)).status).toBe(403)
  })

  test.each(allowed)('%s is not refused for its role', async (_, endpoint) => {
    const answer = await send(home[role as keyof Omit<Crew, 'workshopId'>].call, endpoint)
    expect([200, 404, 409, 422]).toContain(answer.status)
  })
})

describe('from another workshop', () => {
  test.each(scoped)('%s answers 404, or 403 by role, and never the thing', async (_, endpoint) => {
    for (const role of roles) {
      const answer = await call(away[role], endpoint)
      const permitted = endpoint.access === 'signed-in' || permissionsOf[role].includes(endpoint.access as never)
      expect(answer.status, role).toBe(permitted ? 404 : 403)
    }
  })

  /** Bodies that pass the schema, so that it is the scope that refuses. */
  const bodies: Record<string, unknown> = {
    'PATCH /api/vehicles/:vehicleId': { version: 1, name: 'mine' },
    'PUT /api/vehicles/:vehicleId/engine-sheet': {
      displacementL: 3,
      cylinders: 6,
      boosted: false,
      revLimitRpm: 6000,
      injectorFlowCcMin: 200,
      injectorPressureKpa: 300,
      deadTimeMs: 1,
      fuel: 'e10',
      stoichAfr: 14,
      fuelDensityGPerCc: 0.75,
      lambdaLow: 0.65,
      lambdaHigh: 1.4,
    },
    'POST /api/vehicles/:vehicleId/table-previews': { kind: 've', text: 'x' },
    'POST /api/vehicles/:vehicleId/revisions': { kind: 've', text: 'x', origin: 'paste' },
    'POST /api/vehicles/:vehicleId/logs': { title: '' },
    'PATCH /api/logs/:logId': { version: 1, title: 'mine' },
    'PUT /api/logs/:logId/mapping': { columns: [] },
    'POST /api/vehicles/:vehicleId/proposals': { logIds: ['00000000-0000-4000-8000-000000000000'] },
    'POST /api/proposals/:proposalId/decisions': { version: 1, cells: [{ cell: 0, decision: 'kept' }] },
    'POST /api/proposals/:proposalId/revision': { version: 1 },
    'POST /api/proposals/:proposalId/logs': { version: 1, logIds: ['00000000-0000-4000-8000-000000000000'] },
    'POST /api/proposals/:proposalId/carry-over': {
      version: 1,
      ontoId: '00000000-0000-4000-8000-000000000000',
      answers: [],
    },
    'POST /api/revisions/:revisionId/restoration': { note: '' },
    'POST /api/revisions/:revisionId/submission': { note: '' },
    'POST /api/revisions/:revisionId/sign-off': { name: 'x', checksum: 'a'.repeat(64), note: '' },
    'POST /api/revisions/:revisionId/send-back': { note: 'no' },
    'POST /api/revisions/:revisionId/comments': { text: 'hello' },
    'POST /api/vehicles/:vehicleId/read-backs': { text: 'x' },
  }

  const queries: Record<string, Record<string, string>> = {
    '/api/logs/:logId/traces': { channels: 'rpm' },
    '/api/proposals/:proposalId/replay': { logId: '00000000-0000-4000-8000-000000000000' },
  }

  async function call(person: Person, endpoint: AnyEndpoint) {
    const body = bodies[`${endpoint.method} ${endpoint.path}`]
    const query = queries[endpoint.path] ?? {}
    const file = endpoint.bodyKind === 'upload' ? { file: { name: 'x.csv', content: 'a,b\n1,2\n' } } : {}
    return person.call(endpoint, { params: ids, query, ...(body === undefined ? {} : { body }), ...file })
  }
})
