/** Notices: who is told of what, in the way they chose, in words that carry no secret. */
import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { tell } from '../../server/features/notices/service.ts'
import { writeMessage } from '../../server/platform/mail/send.ts'
import { askPasswordReset, invite, listDemoMails, removePerson } from '../../shared/contract/accounts.ts'
import { uploadLog } from '../../shared/contract/logs.ts'
import { getNoticeChoices, listNotices, readNotices, setNoticeChoices } from '../../shared/contract/notices.ts'
import { addComment, signOff } from '../../shared/contract/reviews.ts'
import { changeVehicle, getVehicle } from '../../shared/contract/vehicles.ts'
import { aRevision, signature } from '../support/revision.ts'
import { aWorkshop, startServer, type Crew, type Person, type TestServer } from '../support/server.ts'
import { aVehicle } from '../support/vehicle.ts'

let server: TestServer
beforeAll(async () => {
  server = await startServer()
})
afterAll(() => server.close())

let workshops = 0
async function aCrew(): Promise<{ crew: Crew; vehicleId: string }> {
  workshops += 1
  const crew = await aWorkshop(server, `notices-${workshops}`)
  return { crew, vehicleId: (await aVehicle(server, crew)).vehicle.id }
}

const titlesOf = async (person: Person) =>
  (await person.call(listNotices, { query: {} })).body.notices.map(({ title }) => title)

async function mailsTo(person: Person) {
  await server.drain()
  const { mails } = (await server.caller({})(listDemoMails)).body
  return mails.filter((mail) => mail.to.includes(person.email))
}

describe('who is told', () => {
  test('when a revision is submitted and sent back, then the reviewer and the author are told, and nobody else', async () => {
    const { crew, vehicleId } = await aCrew()
    await aRevision(crew, vehicleId, 'sent-back')
    expect(await titlesOf(crew.reviewer)).toEqual(['Revision 2 of Test flatbed waits for you'])
    expect(await titlesOf(crew.tuner)).toEqual(['Revision 2 of Test flatbed was sent back'])
    expect(await titlesOf(crew.owner)).toEqual([])
    expect(await titlesOf(crew.admin)).toEqual([])
    expect((await mailsTo(crew.reviewer)).map(({ subject }) => subject)).toEqual([
      'Revision 2 of Test flatbed waits for you',
    ])
    expect(await mailsTo(crew.owner)).toEqual([])
  })

  test('when it is signed, then author and owner are told; an owner who left the workshop is not', async () => {
    const { crew, vehicleId } = await aCrew()
    await aRevision(crew, vehicleId, 'signed')
    expect(await titlesOf(crew.owner)).toEqual(['Revision 2 of Test flatbed is signed'])
    const before = (await mailsTo(crew.owner)).length
    await crew.admin.call(removePerson, { params: { personId: crew.owner.id } })
    await aRevision(crew, vehicleId, 'signed')
    expect(await mailsTo(crew.owner)).toHaveLength(before)
    expect(await titlesOf(crew.tuner)).toHaveLength(2)
  })

  test('when somebody comments, then author, earlier speakers and those named are told, each once, never the speaker', async () => {
    const { crew, vehicleId } = await aCrew()
    const revision = await aRevision(crew, vehicleId)
    const say = (by: Person, text: string) =>
      by.call(addComment, { params: { revisionId: revision.id }, body: { cell: null, text } })
    await say(crew.reviewer, `@${crew.tuner.name} is this right?`)
    expect(await titlesOf(crew.tuner)).toEqual([
      `${crew.reviewer.name} names you in a comment on revision 2 of Test flatbed`,
    ])
    await say(crew.tuner, 'It is.')
    expect(await titlesOf(crew.reviewer)).toEqual([`${crew.tuner.name} commented on revision 2 of Test flatbed`])
    expect(await titlesOf(crew.tuner)).toHaveLength(1)
  })

  test('when a log cannot be read, then who uploaded it is told, once, even when the job runs again', async () => {
    const { crew, vehicleId } = await aCrew()
    const log = (
      await crew.tuner.call(uploadLog, {
        params: { vehicleId },
        body: { title: 'No log' },
        file: { name: 'x.csv', content: `%PDF-1.7 ${vehicleId}` },
      })
    ).body
    await server.drain()
    await server.deps.db.execute(
      sql`select graphile_worker.add_job('log.read', ${JSON.stringify({ logId: log.id })}::json)`,
    )
    await server.drain()
    expect(await titlesOf(crew.tuner)).toEqual(['Log 1 of Test flatbed could not be read'])
    expect(await mailsTo(crew.tuner)).toHaveLength(1)
    expect(await titlesOf(crew.reviewer)).toEqual([])
  })

  test('when the fact does not hold, then nobody is told', async () => {
    const { crew, vehicleId } = await aCrew()
    const revision = await aRevision(crew, vehicleId, 'submitted')
    await server.drain()
    const told = (await titlesOf(crew.tuner)).length
    const wrong = { ...signature(crew, revision), checksum: '0'.repeat(64) }
    await crew.reviewer.call(signOff, { params: { revisionId: revision.id }, body: wrong })
    expect(await titlesOf(crew.tuner)).toHaveLength(told)
    expect(await mailsTo(crew.owner)).toEqual([])
  })
})

describe('what a person chooses', () => {
  test('a kind can be left out of the list, of the mails, or of both; the rest stays', async () => {
    const { crew, vehicleId } = await aCrew()
    const choose = (inApp: boolean, mail: boolean) =>
      crew.reviewer.call(setNoticeChoices, { body: { choices: [{ kind: 'review-asked', inApp, mail }] } })
    expect((await crew.reviewer.call(getNoticeChoices)).body.choices).toHaveLength(5)
    const count = async () => [(await titlesOf(crew.reviewer)).length, (await mailsTo(crew.reviewer)).length]
    await choose(true, false)
    await aRevision(crew, vehicleId, 'submitted')
    expect(await count()).toEqual([1, 0])
    await choose(false, true)
    await aRevision(crew, vehicleId, 'submitted')
    expect(await count()).toEqual([1, 1])
    const { choices } = (await choose(false, false)).body
    await aRevision(crew, vehicleId, 'submitted')
    expect(await count()).toEqual([1, 1])
    expect(choices.find(({ kind }) => kind === 'comment')).toEqual({ kind: 'comment', inApp: true, mail: true })
  })
})

describe('the list', () => {
  test('is one’s own, counts what is unread, and is read up to where one looked', async () => {
    const { crew, vehicleId } = await aCrew()
    await aRevision(crew, vehicleId, 'submitted')
    await aRevision(crew, vehicleId, 'submitted')
    const { notices, unread } = (await crew.reviewer.call(listNotices, { query: {} })).body
    expect(unread).toBe(2)
    expect(notices[0]!.id).toBeGreaterThan(notices[1]!.id)
    // Somebody else's hand on the same numbers changes nothing.
    await crew.tuner.call(readNotices, { body: { upTo: notices[0]!.id } })
    expect((await crew.reviewer.call(readNotices, { body: { upTo: notices[1]!.id } })).body.unread).toBe(1)
    const after = (await crew.reviewer.call(listNotices, { query: {} })).body.notices
    expect(after.map(({ read }) => read)).toEqual([false, true])
  })

  test('when an owner is taken off a vehicle, then its notices are gone for them', async () => {
    const { crew, vehicleId } = await aCrew()
    await aRevision(crew, vehicleId, 'signed')
    expect(await titlesOf(crew.owner)).toHaveLength(1)
    const params = { vehicleId }
    const { version } = (await crew.tuner.call(getVehicle, { params })).body
    await crew.tuner.call(changeVehicle, { params, body: { version, ownerIds: [] } })
    const { notices, unread } = (await crew.owner.call(listNotices, { query: {} })).body
    expect([notices, unread]).toEqual([[], 0])
  })

  test('goes on page by page', async () => {
    const { crew, vehicleId } = await aCrew()
    await server.deps.db.transaction(async (tx) => {
      for (let i = 0; i < 60; i += 1) {
        const about = { kind: 'comment' as const, workshopId: crew.workshopId, vehicleId, words: [], linkWords: 'Open' }
        await tell(server.deps, tx, [crew.tuner.id], { ...about, title: `Notice ${i}`, path: '/' })
      }
    })
    const first = (await crew.tuner.call(listNotices, { query: {} })).body
    const second = (await crew.tuner.call(listNotices, { query: { before: first.next! } })).body
    expect([first.notices.length, second.notices.length, second.next]).toEqual([50, 10, null])
    expect(second.notices[0]!.title).toBe('Notice 9')
  })
})

describe('the mails', () => {
  test('say the same as plain text and as HTML, with what people wrote as text', async () => {
    const { crew, vehicleId } = await aCrew()
    const revision = await aRevision(crew, vehicleId)
    const text = '<img src=x onerror=alert(1)> & "quoted"'
    await crew.reviewer.call(addComment, { params: { revisionId: revision.id }, body: { cell: null, text } })
    const [mail] = await mailsTo(crew.tuner)
    const url = `http://evenburn.test/vehicles/${vehicleId}/revisions/${revision.id}`
    expect(mail!.text).toContain(`writes: “${text}”`)
    expect(mail!.text).toContain(`Open revision 2:\n${url}`)
    expect(mail!.text).toMatch(/You get this because .* http:\/\/evenburn\.test\/notices/)
    expect(mail!.html).toContain('&lt;img src=x onerror=alert(1)&gt; &amp; &quot;quoted&quot;')
    expect(mail!.html).not.toContain('<img')
    expect(mail!.html).toContain(`href="${url}"`)
    const words = mail!.html
      .replace(/<head>.*<\/head>|<[^>]+>/gs, ' ')
      .replaceAll('&lt;', '<')
      .replaceAll('&gt;', '>')
      .replaceAll('&quot;', '"')
      .replaceAll('&#39;', "'")
      .replaceAll('&amp;', '&')
      .split(/\s+/)
    for (const word of mail!.text.replaceAll(':\n', '\n').split(/\s+/)) if (word !== '--') expect(words).toContain(word)
  })

  test('a subject stays one line, whatever is in a name', () => {
    expect(writeMessage('Revision 2\r\nBcc: everybody@example.com', []).subject).toBe(
      'Revision 2 Bcc: everybody@example.com',
    )
  })

  test('when a password or an invitation is asked for, then no job ever holds a link that works', async () => {
    const { crew } = await aCrew()
    await server.drain()
    await server.caller({})(askPasswordReset, { body: { email: crew.tuner.email } })
    const email = `guest-${workshops}@notices.example`
    await crew.admin.call(invite, { body: { email, roles: ['owner'], vehicleIds: [] } })
    const { rows } = await server.deps.db.execute<{ name: string; payload: object }>(
      sql`select identifier as name, payload from graphile_worker._private_jobs as jobs
          join graphile_worker._private_tasks as tasks on tasks.id = jobs.task_id`,
    )
    expect(rows.map(({ name }) => name).sort()).toEqual(['account.send-invitation', 'account.send-reset'])
    for (const { payload } of rows)
      expect(Object.keys(payload)).toEqual([expect.stringMatching(/^(reset|invitation)Id$/)])
    const [reset] = await mailsTo(crew.tuner)
    expect(reset!.text).toMatch(/\/reset\/[\w-]{20,}/)
    const { mails } = (await server.caller({})(listDemoMails)).body
    expect(mails.find(({ to }) => to.includes(email))?.text).toMatch(/\/invitation\/[\w-]{20,}/)
  })
})
