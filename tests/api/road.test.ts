/** The whole road over HTTP with three people: a log goes in, a signed table comes out, and the mails arrive. */
import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { trueTable } from '../../sample-logs/simulator/engine.ts'
import { readTable } from '../../server/core/tables/read-table.ts'
import { checkReadBack, exportTable } from '../../shared/contract/exports.ts'
import { listDemoMails } from '../../shared/contract/accounts.ts'
import { downloadLog, getLog, getTraces, mapColumns, removeLog, uploadLog } from '../../shared/contract/logs.ts'
import {
  decideCells,
  getProposal,
  makeRevision,
  requestProposal,
  type Proposal,
} from '../../shared/contract/proposals.ts'
import {
  addComment,
  getReview,
  resolveComment,
  sendBack,
  signOff,
  submitRevision,
  withdrawRevision,
} from '../../shared/contract/reviews.ts'
import { bringTable, getRevision, listRevisions, markFlashed, previewTable } from '../../shared/contract/tables.ts'
import { changeVehicle, getVehicle } from '../../shared/contract/vehicles.ts'
import { aWorkshop, startServer, type Crew, type TestServer } from '../support/server.ts'
import { aVehicle, driveCsv, veCsv } from '../support/vehicle.ts'

let server: TestServer
let crew: Crew
beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'road')
})
afterAll(() => server.close())

async function learned() {
  const made = await aVehicle(server, crew, { log: true })
  const params = { vehicleId: made.vehicle.id }
  const request = await crew.tuner.call(requestProposal, { params, body: { logIds: [made.log!.id], stepCapPct: 20 } })
  expect(request.body.state).toBe('queued')
  await server.drain()
  const proposal = (await crew.tuner.call(getProposal, { params: { proposalId: request.body.id } })).body
  return { ...made, proposal }
}

const acceptAll = (proposal: Proposal) =>
  crew.tuner.call(decideCells, {
    params: { proposalId: proposal.id },
    body: {
      version: proposal.version,
      cells: proposal.decisions.flatMap((decision, cell) =>
        decision === 'open' ? [{ cell, decision: 'accepted' as const }] : [],
      ),
    },
  })

async function draft() {
  const made = await learned()
  const decided = (await acceptAll(made.proposal)).body
  const revision = (
    await crew.tuner.call(makeRevision, {
      params: { proposalId: decided.id },
      body: { version: decided.version, note: 'first' },
    })
  ).body
  return { ...made, revision, decided }
}

describe('the road', () => {
  test('when a log is read, then its channels, health and original are there', async () => {
    const { log } = await aVehicle(server, crew, { log: true })
    const read = (await crew.tuner.call(getLog, { params: { logId: log!.id } })).body
    expect(read.state).toBe('ready')
    expect(read.rows).toBe(6000)
    expect(read.rateHz).toBeCloseTo(20, 1)
    expect(read.channels).toContain('lambda')
    expect(read.flashedRevision?.number).toBe(1)
    const original = await crew.owner.call(downloadLog, { params: { logId: log!.id } })
    expect(original.text).toBe(driveCsv())
    const traces = (
      await crew.owner.call(getTraces, { params: { logId: log!.id }, query: { channels: 'rpm,map', points: 100 } })
    ).body
    expect(traces.traces.map((trace) => trace.channel)).toEqual(['rpm', 'map'])
    expect(traces.traces[0]!.timeS).toHaveLength(100)
  })

  test('when logs are learned, then the table comes nearer to the simulator’s truth than before', async () => {
    const { proposal } = await learned()
    expect(proposal.state).toBe('open')
    const truth = trueTable(flatbed.engine, flatbed.grid)
    const { surface } = proposal
    const rms = (values: readonly (number | null)[]) => {
      const errors = values.flatMap((value, cell) =>
        (surface!.evidenceS[cell] ?? 0) >= 1 ? [Math.log(value! / truth[cell]!) ** 2] : [],
      )
      return 100 * Math.sqrt(errors.reduce((sum, each) => sum + each, 0) / errors.length)
    }
    expect(rms(surface!.fitted)).toBeLessThan(rms(surface!.current) / 3)
  })

  test('when tuner, reviewer and owner each do their part, then a signed table leaves and reads back to the same values', async () => {
    const { vehicle, revision, decided } = await draft()
    const params = { revisionId: revision.id }
    expect(revision.number).toBe(2)
    expect(revision.logs).toHaveLength(1)
    expect(revision.cellsChanged).toBe(decided.counts!.changed)
    const draftFile = await crew.tuner.call(exportTable, { params })
    expect(draftFile.text).toContain('DRAFT, NOT SIGNED')
    expect(draftFile.headers.get('content-disposition')).toContain('DRAFT')

    await crew.tuner.call(submitRevision, { params, body: { note: 'The idle cells are the point.' } })
    const review = (await crew.reviewer.call(getReview, { params })).body
    expect(review.lookFirst.length).toBeGreaterThan(0)
    expect(review.may.signOff).toBe(true)
    const signed = await crew.reviewer.call(signOff, {
      params,
      body: { name: crew.reviewer.name, checksum: revision.checksum, note: 'Looked at all of it.' },
    })
    expect(signed.body.state).toBe('signed')
    expect(signed.body.signature?.byAuthor).toBe(false)

    expect((await crew.owner.call(getRevision, { params })).body.state).toBe('signed')
    for (const query of [{}, { axes: 'rpm-down' as const, decimal: 'comma' as const }]) {
      const file = await crew.owner.call(exportTable, { params, query })
      expect(file.text).toContain(`Signed by ${crew.reviewer.name}`)
      const read = readTable(file.text, { kind: 've', stoichAfr: 14.1 })
      expect(read.ok && [...read.values]).toEqual(revision.values)
      const check = (
        await crew.owner.call(checkReadBack, {
          params: { vehicleId: vehicle.id },
          body: { text: file.text, kind: 've' },
        })
      ).body
      expect(check.matches?.number).toBe(2)
    }

    await server.drain()
    const mails = (await crew.tuner.call(listDemoMails)).body.mails
    const to = (email: string) => mails.filter((mail) => mail.to.includes(email)).map((mail) => mail.subject)
    expect(to(crew.reviewer.email)).toContain('Revision 2 of Test flatbed waits for you')
    expect(to(crew.tuner.email)).toContain('Revision 2 of Test flatbed is signed')
    expect(to(crew.owner.email)).toContain('Revision 2 of Test flatbed is signed')
  })
})

describe('what the life cycle refuses', () => {
  test('when the author signs their own revision, then 403', async () => {
    const { revision } = await draft()
    const params = { revisionId: revision.id }
    await crew.tuner.call(submitRevision, { params, body: { note: '' } })
    const answer = await crew.tuner.call(signOff, {
      params,
      body: { name: crew.tuner.name, checksum: revision.checksum, note: '' },
    })
    expect(answer.status).toBe(403)
    expect(answer.problem?.type).toMatch(/own-revision$/)
  })

  test('when a draft is signed or sent back, then 409; when a submitted one is submitted again, then 409', async () => {
    const { revision } = await draft()
    const params = { revisionId: revision.id }
    const sign = { name: crew.reviewer.name, checksum: revision.checksum, note: '' }
    expect((await crew.reviewer.call(signOff, { params, body: sign })).status).toBe(409)
    expect((await crew.reviewer.call(sendBack, { params, body: { note: 'no' } })).status).toBe(409)
    await crew.tuner.call(submitRevision, { params, body: { note: '' } })
    expect((await crew.tuner.call(submitRevision, { params, body: { note: '' } })).status).toBe(409)
  })

  test('when two sign at once, then one signs and the other is told', async () => {
    const { revision } = await draft()
    const params = { revisionId: revision.id }
    await crew.tuner.call(submitRevision, { params, body: { note: '' } })
    const sign = () =>
      crew.reviewer.call(signOff, { params, body: { name: crew.reviewer.name, checksum: revision.checksum, note: '' } })
    const statuses = (await Promise.all([sign(), sign(), sign()])).map(({ status }) => status).sort((a, b) => a - b)
    expect(statuses).toEqual([200, 409, 409])
  })

  test('when the wrong name or checksum is given, then nothing is signed', async () => {
    const { revision } = await draft()
    const params = { revisionId: revision.id }
    await crew.tuner.call(submitRevision, { params, body: { note: '' } })
    expect(
      (await crew.reviewer.call(signOff, { params, body: { name: 'Somebody', checksum: revision.checksum, note: '' } }))
        .status,
    ).toBe(422)
    expect(
      (
        await crew.reviewer.call(signOff, {
          params,
          body: { name: crew.reviewer.name, checksum: '0'.repeat(64), note: '' },
        })
      ).status,
    ).toBe(409)
    expect((await crew.reviewer.call(getRevision, { params })).body.state).toBe('submitted')
  })

  test('when the reviewer’s own comment is open, then signing waits for it; sent back, it can be submitted again', async () => {
    const { revision } = await draft()
    const params = { revisionId: revision.id }
    await crew.tuner.call(submitRevision, { params, body: { note: '' } })
    const comment = (await crew.reviewer.call(addComment, { params, body: { cell: 3, text: 'Was this one pull?' } }))
      .body
    const body = { name: crew.reviewer.name, checksum: revision.checksum, note: '' }
    expect((await crew.reviewer.call(signOff, { params, body })).problem?.type).toMatch(/comments-open$/)
    await crew.tuner.call(resolveComment, { params: { commentId: comment.id } })
    expect((await crew.reviewer.call(sendBack, { params, body: { note: 'Drive the hill again.' } })).body.state).toBe(
      'sent-back',
    )
    expect((await crew.tuner.call(submitRevision, { params, body: { note: '' } })).body.state).toBe('submitted')
    expect((await crew.tuner.call(withdrawRevision, { params })).body.state).toBe('draft')
  })

  test('when a signed revision is changed in the database itself, then the database refuses', async () => {
    const { revision } = await draft()
    const params = { revisionId: revision.id }
    await crew.tuner.call(submitRevision, { params, body: { note: '' } })
    await crew.reviewer.call(signOff, {
      params,
      body: { name: crew.reviewer.name, checksum: revision.checksum, note: '' },
    })
    const { pool } = server.deps
    await expect(pool.query("update revisions set note = 'changed' where id = $1", [revision.id])).rejects.toThrow(
      /signed and cannot change/,
    )
    await expect(pool.query('delete from revisions where id = $1', [revision.id])).rejects.toThrow(
      /signed and cannot change/,
    )
    await expect(pool.query('delete from audit_entries')).rejects.toThrow(/only grows/)
    await expect(server.deps.db.execute(sql`update audit_entries set person_name = 'nobody'`)).rejects.toThrow()
  })

  test('when the cells of a draft are changed in the database, then the database refuses', async () => {
    const { revision } = await draft()
    await expect(
      server.deps.pool.query("update revisions set cells = '\\x00' where id = $1", [revision.id]),
    ).rejects.toThrow(/frozen/)
  })

  test('when somebody decided meanwhile, then the later decision is told and nothing is lost', async () => {
    const { proposal } = await learned()
    const params = { proposalId: proposal.id }
    const cell = proposal.decisions.indexOf('open')
    const decide = (version: number, decision: 'accepted' | 'kept') =>
      crew.tuner.call(decideCells, { params, body: { version, cells: [{ cell, decision }] } })
    expect((await decide(proposal.version, 'accepted')).status).toBe(200)
    const late = await decide(proposal.version, 'kept')
    expect(late.status).toBe(409)
    expect(late.problem?.type).toMatch(/changed-meanwhile$/)
    expect((await crew.tuner.call(getProposal, { params })).body.decisions[cell]).toBe('accepted')
  })

  test('when nothing was accepted, then no revision is made; when a cell has no evidence, then it cannot be accepted', async () => {
    const { proposal } = await learned()
    const params = { proposalId: proposal.id }
    expect(
      (await crew.tuner.call(makeRevision, { params, body: { version: proposal.version, note: '' } })).problem?.type,
    ).toMatch(/nothing-accepted$/)
    const blank = proposal.decisions.indexOf('kept')
    const answer = await crew.tuner.call(decideCells, {
      params,
      body: { version: proposal.version, cells: [{ cell: blank, decision: 'accepted' }] },
    })
    expect(answer.status).toBe(422)
  })

  test('when a cell is set by hand, then the revision holds that value and says so', async () => {
    const { proposal } = await learned()
    const params = { proposalId: proposal.id }
    const decided = (
      await crew.tuner.call(decideCells, {
        params,
        body: { version: proposal.version, cells: [{ cell: 0, decision: 'by-hand', value: 51.23 }] },
      })
    ).body
    const revision = (await crew.tuner.call(makeRevision, { params, body: { version: decided.version, note: '' } }))
      .body
    expect(revision.values[0]).toBe(51.2)
    expect(revision.provenance?.decision[0]).toBe('by-hand')
    expect(revision.cellsChanged).toBe(1)
  })
})

describe('who works alone', () => {
  test('when the workshop allows it, then an author signs, and the signature and the file say so', async () => {
    const alone = await aWorkshop(server, 'alone', true)
    const everybody = crew
    crew = alone
    try {
      const { revision } = await draft()
      const params = { revisionId: revision.id }
      await alone.tuner.call(submitRevision, { params, body: { note: '' } })
      expect((await alone.tuner.call(getReview, { params })).body.signsOwn).toBe(true)
      const body = { name: alone.tuner.name, checksum: revision.checksum, note: '' }
      expect((await alone.tuner.call(signOff, { params, body })).body.signature?.byAuthor).toBe(true)
      expect((await alone.tuner.call(exportTable, { params })).text).toContain('its author')
    } finally {
      crew = everybody
    }
  })
})

describe('owners', () => {
  test('when a revision is a draft, then an owner finds nothing; when it is in the engine, then they read it', async () => {
    const { vehicle, revision } = await draft()
    const params = { revisionId: revision.id }
    expect((await crew.owner.call(getRevision, { params })).status).toBe(404)
    const seen = (await crew.owner.call(listRevisions, { params: { vehicleId: vehicle.id }, query: {} })).body.revisions
    expect(seen.map(({ number, kind }) => [kind, number])).toEqual([['ve', 1]])
    await crew.tuner.call(markFlashed, { params, body: { unsigned: true } })
    expect((await crew.owner.call(getRevision, { params })).status).toBe(200)
  })

  test('when an owner is taken off a vehicle, then it is gone for them', async () => {
    const { vehicle } = await aVehicle(server, crew)
    const params = { vehicleId: vehicle.id }
    const { version } = (await crew.owner.call(getVehicle, { params })).body
    await crew.tuner.call(changeVehicle, { params, body: { version, ownerIds: [] } })
    expect((await crew.owner.call(getVehicle, { params })).status).toBe(404)
    expect((await crew.tuner.call(changeVehicle, { params, body: { version, name: 'late' } })).problem?.type).toMatch(
      /changed-meanwhile$/,
    )
  })
})

describe('bad input', () => {
  test('when a table cannot be read, then each fault is named with its row and column', async () => {
    const { vehicle } = await aVehicle(server, crew)
    const text = veCsv.replace('\r\n32,', '\r\n32,x')
    const preview = (
      await crew.tuner.call(previewTable, { params: { vehicleId: vehicle.id }, body: { kind: 've', text } })
    ).body
    expect(preview).toMatchObject({ ok: false, problems: [{ row: 3, col: 2 }] })
    const answer = await crew.tuner.call(bringTable, {
      params: { vehicleId: vehicle.id },
      body: { kind: 've', text, origin: 'paste', note: '', inEngine: false },
    })
    expect(answer.status).toBe(422)
    expect(answer.problem?.errors?.[0]?.detail).toMatch(/^Row 3, column 2: “x/)
    expect(
      (await crew.tuner.call(listRevisions, { params: { vehicleId: vehicle.id }, query: { kind: 've' } })).body
        .revisions,
    ).toHaveLength(1)
  })

  test('when the same log comes twice, then it is said which log it is', async () => {
    const { vehicle } = await aVehicle(server, crew, { log: true })
    const again = await crew.tuner.call(uploadLog, {
      params: { vehicleId: vehicle.id },
      body: { title: '' },
      file: { name: 'again.csv', content: driveCsv() },
    })
    expect(again.status).toBe(409)
    expect(again.problem?.detail).toMatch(/^It is Log 1/)
  })

  test.each([
    ['%PDF-1.7 something', /PDF document/],
    ['<!doctype html><p>hello', /web page/],
    ['just words\nand more words\n', /No line of numbers/],
  ])('when the file is no log (%s), then it is refused in plain words', async (content, words) => {
    const { vehicle } = await aVehicle(server, crew)
    const log = (
      await crew.tuner.call(uploadLog, {
        params: { vehicleId: vehicle.id },
        body: { title: '' },
        file: { name: 'x.csv', content },
      })
    ).body
    await server.drain()
    const read = (await crew.tuner.call(getLog, { params: { logId: log.id } })).body
    expect(read.state).toBe('rejected')
    expect(read.trouble).toMatch(words)
  })

  test('when the same log comes twice at once, then it is stored once', async () => {
    const { vehicle } = await aVehicle(server, crew)
    const upload = () =>
      crew.tuner.call(uploadLog, {
        params: { vehicleId: vehicle.id },
        body: { title: '' },
        file: { name: 'twin.csv', content: driveCsv() },
      })
    const answers = await Promise.all([upload(), upload()])
    expect(answers.map(({ status }) => status).sort((a, b) => a - b)).toEqual([200, 409])
    await server.drain()
  })

  test('when columns are not recognised, then they are asked for, and the answer is remembered for the next such log', async () => {
    const { vehicle } = await aVehicle(server, crew)
    const params = { vehicleId: vehicle.id }
    const rename = (csv: string) => csv.replace('Engine speed (rpm)', 'Kanal 7').replace('MAP (kPa)', 'Kanal 8')
    const first = (
      await crew.tuner.call(uploadLog, {
        params,
        body: { title: '' },
        file: { name: 'a.csv', content: rename(driveCsv()) },
      })
    ).body
    await server.drain()
    const asked = (await crew.tuner.call(getLog, { params: { logId: first.id } })).body
    expect(asked.state).toBe('needs-mapping')
    expect(asked.trouble).toMatch(/rpm, map/)
    const columns = [
      { index: 1, channel: 'rpm' as const, unit: 'rpm' },
      { index: 2, channel: 'map' as const, unit: 'kPa' },
    ]
    await crew.tuner.call(mapColumns, { params: { logId: first.id }, body: { columns } })
    await server.drain()
    expect((await crew.tuner.call(getLog, { params: { logId: first.id } })).body.state).toBe('ready')
    const second = (
      await crew.tuner.call(uploadLog, {
        params,
        body: { title: '' },
        file: { name: 'b.csv', content: `${rename(driveCsv())}\n` },
      })
    ).body
    await server.drain()
    expect((await crew.tuner.call(getLog, { params: { logId: second.id } })).body.state).toBe('ready')
  })

  test('when a log taught nobody, then it can be removed; when a proposal was learned from it, then it stays', async () => {
    const { log } = await aVehicle(server, crew, { log: true })
    expect((await crew.tuner.call(removeLog, { params: { logId: log!.id } })).status).toBe(200)
    expect((await crew.tuner.call(getLog, { params: { logId: log!.id } })).status).toBe(404)
    const used = await learned()
    expect((await crew.tuner.call(removeLog, { params: { logId: used.log!.id } })).problem?.type).toMatch(/log-in-use$/)
  })
})
