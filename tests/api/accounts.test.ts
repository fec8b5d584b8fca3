/** Signing in and out, passwords, invitations, roles, access tokens, set-up, and what keeps strangers out. */
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import {
  acceptInvitation,
  askPasswordReset,
  changeRoles,
  createToken,
  getMe,
  invite,
  listAudit,
  listDemoMails,
  listPeople,
  removePerson,
  resetPassword,
  revokeToken,
  setUp,
  signIn,
  signOut,
  signOutEverywhere,
} from '../../shared/contract/accounts.ts'
import { createVehicle, listVehicles } from '../../shared/contract/vehicles.ts'
import { aWorkshop, password, startServer, type Crew, type TestServer } from '../support/server.ts'

let server: TestServer
let crew: Crew
beforeAll(async () => {
  server = await startServer({ TRY_LIMIT: '6' })
  crew = await aWorkshop(server, 'accounts')
})
afterAll(() => server.close())

const anybody = () => server.caller({})
async function cookieFor(email: string, word = password) {
  const answer = await anybody()(signIn, { body: { email, password: word } })
  const cookie = answer.headers.get('set-cookie')?.split(';')[0] ?? ''
  return { answer, cookie, call: server.caller({ cookie }) }
}
async function linkTo(email: string, pattern: RegExp): Promise<string> {
  await server.drain()
  const { mails } = (await anybody()(listDemoMails)).body
  const text = mails.find((mail) => mail.to.includes(email) && pattern.test(mail.text))?.text ?? ''
  return pattern.exec(text)?.[1] ?? ''
}

describe('sign-in', () => {
  test('when the password is right, then a cookie that scripts cannot read names a session', async () => {
    const { answer, call } = await cookieFor(crew.tuner.email.toUpperCase())
    expect(answer.status).toBe(200)
    expect(answer.headers.get('set-cookie')).toMatch(/HttpOnly; SameSite=Lax/)
    expect((await call(getMe)).body.person.email).toBe(crew.tuner.email)
  })

  test('when the password is wrong or the account unknown, then the answers are the same', async () => {
    const wrong = (await cookieFor(crew.owner.email, 'not the password')).answer
    const unknown = (await cookieFor('nobody@accounts.example')).answer
    expect([wrong.status, unknown.status]).toEqual([401, 401])
    expect(wrong.problem?.title).toBe(unknown.problem?.title)
  })

  test('when a session is ended, then its cookie is worth nothing; ending all ends the others too', async () => {
    const one = await cookieFor(crew.reviewer.email)
    const two = await cookieFor(crew.reviewer.email)
    await one.call(signOut)
    expect((await one.call(getMe)).status).toBe(401)
    expect((await two.call(getMe)).status).toBe(200)
    const three = await cookieFor(crew.reviewer.email)
    await three.call(signOutEverywhere)
    expect((await two.call(getMe)).status).toBe(401)
  })

  test('when tries fail again and again, then 429 with the time to wait', async () => {
    let last = (await cookieFor('guess@accounts.example', 'wrong')).answer
    for (let i = 0; i < 8; i += 1) last = (await cookieFor('guess@accounts.example', 'wrong')).answer
    expect(last.status).toBe(429)
    expect(Number(last.headers.get('retry-after'))).toBeGreaterThan(0)
    await server.deps.pool.query('delete from tries')
  })
})

describe('passwords', () => {
  test('when the link from the mail is used, then the new password works, once, and every session ends', async () => {
    const before = await cookieFor(crew.owner.email)
    expect((await anybody()(askPasswordReset, { body: { email: crew.owner.email } })).status).toBe(200)
    const token = await linkTo(crew.owner.email, /\/reset\/([\w-]+)/)
    expect(token).not.toBe('')
    expect((await anybody()(resetPassword, { params: { token }, body: { password: 'short' } })).status).toBe(422)
    expect((await anybody()(resetPassword, { params: { token }, body: { password: 'ä'.repeat(37) } })).status).toBe(422)
    expect(
      (await anybody()(resetPassword, { params: { token }, body: { password: 'another long password' } })).status,
    ).toBe(200)
    expect(
      (await anybody()(resetPassword, { params: { token }, body: { password: 'another long password' } })).status,
    ).toBe(410)
    expect((await before.call(getMe)).status).toBe(401)
    expect((await cookieFor(crew.owner.email, 'another long password')).answer.status).toBe(200)
  })

  test('when the account does not exist, then the answer is the same and no mail goes out', async () => {
    expect((await anybody()(askPasswordReset, { body: { email: 'nobody@accounts.example' } })).status).toBe(200)
    expect(await linkTo('nobody@accounts.example', /\/reset\/([\w-]+)/)).toBe('')
  })
})

describe('people', () => {
  test('when somebody is invited as owner of a vehicle, then they join and see that vehicle only', async () => {
    const one = (await crew.tuner.call(createVehicle, { body: { name: 'One', description: '' } })).body
    await crew.tuner.call(createVehicle, { body: { name: 'Two', description: '' } })
    await crew.admin.call(invite, { body: { email: 'New@accounts.example', roles: ['owner'], vehicleIds: [one.id] } })
    const token = await linkTo('new@accounts.example', /\/invitation\/([\w-]+)/)
    const joined = await anybody()(acceptInvitation, { params: { token }, body: { name: 'New Owner', password } })
    expect(joined.status).toBe(200)
    const { call } = await cookieFor('new@accounts.example')
    expect((await call(listVehicles)).body.vehicles.map((vehicle) => vehicle.name)).toEqual(['One'])
    expect((await anybody()(acceptInvitation, { params: { token }, body: { name: 'Again', password } })).status).toBe(
      410,
    )
  })

  test('when the last admin would go, then 409', async () => {
    const params = { personId: crew.admin.id }
    expect((await crew.admin.call(changeRoles, { params, body: { roles: ['tuner'] } })).problem?.type).toMatch(
      /last-admin$/,
    )
    expect((await crew.admin.call(removePerson, { params })).status).toBe(409)
  })

  test('when a role is changed, then it holds at once and stands in the audit trail', async () => {
    const other = await aWorkshop(server, 'roles')
    expect((await other.owner.call(listPeople)).status).toBe(403)
    await other.admin.call(changeRoles, { params: { personId: other.owner.id }, body: { roles: ['reviewer'] } })
    expect((await other.owner.call(listPeople)).status).toBe(200)
    const { entries } = (await other.admin.call(listAudit, { query: { action: 'person' } })).body
    expect(entries[0]).toMatchObject({
      action: 'person.roles',
      personName: other.admin.name,
      subject: other.owner.name,
    })
  })
})

describe('access tokens', () => {
  test('when a token is made, then it works for its role until it is revoked, and is stored only as a hash', async () => {
    const made = (await crew.tuner.call(createToken, { body: { label: 'logger', role: 'tuner' } })).body
    const byToken = server.caller({ authorization: `Bearer ${made.secret}` })
    expect((await byToken(listVehicles)).status).toBe(200)
    const stored = await server.deps.pool.query<{ secret_hash: string }>(
      'select secret_hash from access_tokens where id = $1',
      [made.token.id],
    )
    expect(stored.rows[0]?.secret_hash).not.toContain(made.secret.slice(4))
    expect((await byToken(createToken, { body: { label: 'child', role: 'tuner' } })).status).toBe(403)
    await crew.tuner.call(revokeToken, { params: { tokenId: made.token.id } })
    expect((await byToken(listVehicles)).status).toBe(401)
    expect((await crew.tuner.call(createToken, { body: { label: 'more', role: 'admin' } })).problem?.type).toMatch(
      /token-scope$/,
    )
  })
})

describe('the door', () => {
  test('when another site’s page posts with the cookie, then 403', async () => {
    const from = (headers: Record<string, string>) =>
      crew.tuner.call(createVehicle, { body: { name: 'X', description: '' }, headers })
    expect((await from({ 'sec-fetch-site': 'cross-site' })).status).toBe(403)
    expect((await from({ origin: 'https://elsewhere.example' })).status).toBe(403)
    expect((await from({ origin: 'null' })).status).toBe(403)
    expect((await from({ origin: 'http://evenburn.test' })).status).toBe(200)
  })

  test('when a workshop exists, then set-up is closed', async () => {
    const body = { workshopName: 'Mine', name: 'Me', email: 'me@accounts.example', password }
    expect((await anybody()(setUp, { body })).status).toBe(409)
  })

  test('when two first visits set up at once, then one makes the workshop', async () => {
    const empty = await startServer()
    const body = (n: number) => ({ workshopName: `W${n}`, name: 'Me', email: `me${n}@first.example`, password })
    const answers = await Promise.all([1, 2, 3].map((n) => empty.caller({})(setUp, { body: body(n) })))
    expect(answers.map(({ status }) => status).sort((a, b) => a - b)).toEqual([200, 409, 409])
    await empty.close()
  })

  test('when the body fails its schema, then each fault has a pointer as RFC 9457 shows', async () => {
    const answer = await anybody()(signIn, { body: { email: 'no address', password: '' } })
    expect(answer.status).toBe(422)
    expect(answer.headers.get('content-type')).toMatch(/^application\/problem\+json/)
    expect(answer.problem?.errors?.map(({ pointer }) => pointer)).toEqual(['#/email', '#/password'])
  })

  test('when the address is unknown or the JSON broken, then a problem says so', async () => {
    const unknown = await fetch(`${server.url}/api/nothing`)
    expect([unknown.status, unknown.headers.get('content-type')]).toEqual([
      404,
      'application/problem+json; charset=utf-8',
    ])
    const broken = await fetch(`${server.url}/api/session`, {
      method: 'POST',
      body: '{',
      headers: { 'content-type': 'application/json' },
    })
    expect(broken.status).toBe(400)
  })

  test('when a page is served, then the policy allows no inline script', async () => {
    const policy = (await fetch(`${server.url}/api/health`)).headers.get('content-security-policy') ?? ''
    expect(policy).toMatch(/script-src 'self'(;|$)/)
    expect(policy).toMatch(/frame-ancestors 'none'/)
  })

  test('when the OpenAPI document is asked for, then every endpoint is in it', async () => {
    const { allEndpoints } = await import('../../shared/contract/all.ts')
    const document = (await (await fetch(`${server.url}/api/openapi.json`)).json()) as {
      openapi: string
      paths: Record<string, Record<string, unknown>>
    }
    expect(document.openapi).toBe('3.1.0')
    for (const { endpoint } of allEndpoints) {
      expect(
        document.paths[endpoint.path.replace(/:(\w+)/g, '{$1}')]?.[endpoint.method.toLowerCase()],
        endpoint.path,
      ).toBeDefined()
    }
  })
})
