/** The life cycle of a revision: every move from every state, by everybody, at once, and around the API. */
import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { appendRevision } from '../../server/features/tables/service.ts'
import { checklistKeys } from '../../shared/cautions.ts'
import {
  addComment,
  getHistory,
  getReview,
  resolveComment,
  restoreRevision,
  sendBack,
  signOff,
  submitRevision,
  withdrawRevision,
} from '../../shared/contract/reviews.ts'
import { bringTable, getRevision, type Revision } from '../../shared/contract/tables.ts'
import { revisionStates, type RevisionMove } from '../../shared/lifecycle.ts'
import { aRevision, changedCsv, signature } from '../support/revision.ts'
import { aWorkshop, startServer, type Crew, type Person, type TestServer } from '../support/server.ts'
import { aVehicle, targetCsv } from '../support/vehicle.ts'

let server: TestServer
let crew: Crew
let vehicleId: string
beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'reviews')
  vehicleId = (await aVehicle(server, crew)).vehicle.id
})
afterAll(() => server.close())

const moves: Record<RevisionMove, (revision: Revision, by?: Person) => Promise<{ status: number }>> = {
  submit: (revision, by = crew.tuner) =>
    by.call(submitRevision, { params: { revisionId: revision.id }, body: { note: '' } }),
  withdraw: (revision, by = crew.tuner) => by.call(withdrawRevision, { params: { revisionId: revision.id } }),
  'sign-off': (revision, by = crew.reviewer) =>
    by.call(signOff, { params: { revisionId: revision.id }, body: { ...signature(crew, revision), name: by.name } }),
  'send-back': (revision, by = crew.reviewer) =>
    by.call(sendBack, { params: { revisionId: revision.id }, body: { note: 'Once more.' } }),
}
const moveNames = Object.keys(moves) as RevisionMove[]
const now = async (revision: Revision) =>
  (await crew.tuner.call(getRevision, { params: { revisionId: revision.id } })).body
const movesMade = async (revision: Revision) =>
  (await crew.tuner.call(getReview, { params: { revisionId: revision.id } })).body.history.length

/** Written out here and not read from the program: what PRODUCT.md's step 7 allows. */
const legal: Record<string, Record<string, string>> = {
  draft: { submit: 'submitted' },
  submitted: { withdraw: 'draft', 'sign-off': 'signed', 'send-back': 'sent-back' },
  'sent-back': { submit: 'submitted' },
  signed: {},
}

describe.each(revisionStates)('from %s', (state) => {
  test.each(moveNames)('%s does what the life cycle says, and nothing where it says nothing', async (move) => {
    const revision = await aRevision(crew, vehicleId, state)
    const before = await movesMade(revision)
    const to = legal[state]?.[move]
    const answer = await moves[move](revision)
    expect(answer.status).toBe(to === undefined ? 409 : 200)
    expect((await now(revision)).state).toBe(to ?? state)
    expect(await movesMade(revision)).toBe(to === undefined ? before : before + 1)
  })
})

describe('who may', () => {
  test.each([
    ['submit', 'draft', { tuner: 200, reviewer: 403, admin: 403, owner: 403 }],
    ['withdraw', 'submitted', { tuner: 200, reviewer: 403, admin: 403, owner: 403 }],
    ['sign-off', 'submitted', { tuner: 403, reviewer: 200, admin: 403, owner: 403 }],
    ['send-back', 'submitted', { tuner: 403, reviewer: 200, admin: 403, owner: 403 }],
  ] as const)('%s a revision that is %s', async (move, state, expected) => {
    for (const role of ['owner', 'admin', 'tuner', 'reviewer'] as const) {
      const revision = await aRevision(crew, vehicleId, state)
      expect((await moves[move](revision, crew[role])).status, role).toBe(expected[role])
    }
  })

  test('when the workshop allows it, then the author signs and the signature says by its author', async () => {
    const alone = await aWorkshop(server, 'one-person', true)
    const { vehicle } = await aVehicle(server, alone)
    const revision = await aRevision(alone, vehicle.id, 'submitted')
    const params = { revisionId: revision.id }
    const signed = await alone.tuner.call(signOff, {
      params,
      body: { name: alone.tuner.name, checksum: revision.checksum, note: '' },
    })
    expect(signed.body.signature).toMatchObject({ byAuthor: true, by: { name: alone.tuner.name } })
    const { history } = (await alone.tuner.call(getReview, { params })).body
    expect(history.at(-1)).toMatchObject({ move: 'sign off', ticked: 0 })
  })
})

describe('at once', () => {
  test('when it is signed, sent back and taken back at once, then exactly one happens and the others are told', async () => {
    for (let round = 0; round < 4; round += 1) {
      const revision = await aRevision(crew, vehicleId, 'submitted')
      const before = await movesMade(revision)
      const racing = [moves['sign-off'], moves['send-back'], moves.withdraw]
      const answers = await Promise.all(racing.map((move) => move(revision)))
      expect(answers.map(({ status }) => status).sort((a, b) => a - b)).toEqual([200, 409, 409])
      const winner = answers.findIndex(({ status }) => status === 200)
      expect((await now(revision)).state).toBe(['signed', 'sent-back', 'draft'][winner])
      expect(await movesMade(revision)).toBe(before + 1)
    }
  })

  test('when a signature is under way, then a comment waits for it and is told that it came too late', async () => {
    const revision = await aRevision(crew, vehicleId, 'submitted')
    const params = { revisionId: revision.id }
    const client = await server.deps.pool.connect()
    try {
      await client.query('begin')
      await client.query("update revisions set state = 'signed' where id = $1", [revision.id])
      const comment = crew.reviewer.call(addComment, { params, body: { cell: null, text: 'Wait.' } })
      for (let waiting = 0; waiting === 0;) {
        const { rows } = await server.deps.pool.query<{ n: number }>(
          'select count(*)::int as n from pg_locks where not granted',
        )
        waiting = rows[0]!.n
      }
      await client.query('commit')
      expect((await comment).problem?.type).toMatch(/revision-already-signed$/)
    } finally {
      client.release()
    }
    expect((await crew.tuner.call(getReview, { params })).body.comments).toEqual([])
  })

  test('when two settle the same comment, then one does and the other is told', async () => {
    const revision = await aRevision(crew, vehicleId, 'submitted')
    const comment = (
      await crew.reviewer.call(addComment, {
        params: { revisionId: revision.id },
        body: { cell: 5, text: 'Was this one pull?' },
      })
    ).body
    const settle = (by: Person) => by.call(resolveComment, { params: { commentId: comment.id } })
    const statuses = (await Promise.all([settle(crew.tuner), settle(crew.reviewer)])).map(({ status }) => status)
    expect(statuses.sort((a, b) => a - b)).toEqual([200, 409])
  })

  test('when two bring and restore tables at once, then every revision has its own number and nothing is lost', async () => {
    const old = await aRevision(crew, vehicleId)
    const restore = () => crew.tuner.call(restoreRevision, { params: { revisionId: old.id }, body: { note: '' } })
    const bring = () => aRevision(crew, vehicleId)
    const [a, b, c, d] = await Promise.all([restore(), bring(), restore(), bring()])
    const numbers = [a.body.number, b.number, c.body.number, d.number].sort((x, y) => x - y)
    expect(numbers).toEqual([1, 2, 3, 4].map((each) => old.number + each))
  })
})

describe('what is signed', () => {
  /** With everything a learned revision has, so that no column is empty. */
  const learned = () =>
    server.deps.db.transaction(async (tx) => {
      const { tuner, workshopId } = crew
      const actor = { ...tuner, personId: tuner.id, workshopId, roles: ['tuner' as const], sessionId: null }
      const values = Float64Array.from(flatbed.flashed, (value, cell) => (cell === 3 ? value + 1 : value))
      const blank = [...values].map(() => null)
      return appendRevision(tx, actor, {
        vehicleId,
        kind: 've',
        grid: flatbed.grid,
        values,
        parentId: (await aRevision(crew, vehicleId)).id,
        cellsChanged: 1,
        origin: 'proposal',
        note: 'as learned',
        proposalId: vehicleId,
        logs: [{ id: vehicleId, number: 1, title: 'A drive', sha256: 'c'.repeat(64) }],
        settings: { stepCapPct: 20 },
        coreVersion: '7',
        provenance: { decision: [...values].map(() => 'accepted' as const), evidenceS: blank, sigmaPct: blank },
      })
    })

  test('keeps checksum, logs, settings and core version, and the checksum is of the cells', async () => {
    const { id } = await learned()
    const params = { revisionId: id }
    const draft = (await crew.tuner.call(getRevision, { params })).body
    await moves.submit(draft)
    const signed = (await crew.reviewer.call(signOff, { params, body: signature(crew, draft, 'Looked.') })).body
    expect(signed).toMatchObject({
      state: 'signed',
      checksum: draft.checksum,
      values: draft.values,
      logs: [{ number: 1, sha256: 'c'.repeat(64) }],
      settings: { stepCapPct: 20 },
      coreVersion: '7',
      signature: { by: { name: crew.reviewer.name }, note: 'Looked.', byAuthor: false },
    })
    const review = (await crew.tuner.call(getReview, { params })).body
    expect(review.intact).toBe(true)
    expect(review.history.at(-1)?.ticked).toBe(checklistKeys.length)
    expect(review.may).toEqual({ submit: false, withdraw: false, signOff: false, sendBack: false, comment: false })
  })

  test('refuses every change of every column in the database itself', async () => {
    const { pool } = server.deps
    const { rows } = await pool.query<{ column_name: string }>(
      "select column_name from information_schema.columns where table_name = 'revisions' and table_schema = 'public'",
    )
    expect(rows.length).toBeGreaterThan(20)
    const signed = await aRevision(crew, vehicleId, 'signed')
    const { id } = await learned()
    const moving = new Set([
      'state',
      'note',
      'submitted_at',
      'signed_by_id',
      'signed_at',
      'signature_note',
      'signature_name',
    ])
    for (const { column_name: column } of rows) {
      const change = (which: string) => pool.query(`update revisions set ${column} = null where id = $1`, [which])
      await expect(change(signed.id), column).rejects.toThrow(/signed and cannot change/)
      if (!moving.has(column)) await expect(change(id), column).rejects.toThrow(/is frozen/)
    }
    await expect(pool.query('truncate revisions cascade')).rejects.toThrow(/never emptied/)
    await expect(pool.query("update review_moves set note = 'x'")).rejects.toThrow(/only grows/)
    await expect(pool.query('delete from review_moves')).rejects.toThrow(/only grows/)
  })

  test('when stored cells no longer give the checksum, then nothing is signed', async () => {
    const revision = await aRevision(crew, vehicleId, 'submitted')
    const { pool } = server.deps
    await pool.query('alter table revisions disable trigger revisions_frozen')
    await pool.query('update revisions set cells = set_byte(cells, 6, 65) where id = $1', [revision.id])
    await pool.query('alter table revisions enable trigger revisions_frozen')
    expect((await moves['sign-off'](revision)).status).toBe(409)
    const review = (await crew.reviewer.call(getReview, { params: { revisionId: revision.id } })).body
    expect(review.intact).toBe(false)
  })

  test('takes no comment any more', async () => {
    const revision = await aRevision(crew, vehicleId, 'signed')
    const answer = await crew.reviewer.call(addComment, {
      params: { revisionId: revision.id },
      body: { cell: null, text: 'Late.' },
    })
    expect(answer.status).toBe(409)
  })
})

describe('comments', () => {
  test('name people by "@", of two names the longer, and nobody who could not read it', async () => {
    const revision = await aRevision(crew, vehicleId, 'submitted')
    const params = { revisionId: revision.id }
    const text = `@${crew.tuner.name} and @${crew.owner.name}, was this one pull?`
    const comment = (await crew.reviewer.call(addComment, { params, body: { cell: 5, text } })).body
    expect(comment.mentions).toEqual([{ id: crew.tuner.id, name: crew.tuner.name }])
    const { mentionable } = (await crew.reviewer.call(getReview, { params })).body
    expect(mentionable.map(({ id }) => id).sort()).toEqual([crew.tuner.id, crew.reviewer.id].sort())
    const settled = (await crew.tuner.call(resolveComment, { params: { commentId: comment.id } })).body
    expect(settled).toMatchObject({ resolvedBy: crew.tuner.name, mentions: [{ id: crew.tuner.id }] })
  })

  test('on a cell that is not there are refused', async () => {
    const revision = await aRevision(crew, vehicleId)
    const body = { cell: revision.values.length, text: 'Where?' }
    const answer = await crew.tuner.call(addComment, { params: { revisionId: revision.id }, body })
    expect(answer.status).toBe(422)
  })
})

describe('the cells to look at first', () => {
  test('of a target table, more lambda at load is leaner and stands first', async () => {
    const own = (await aVehicle(server, crew)).vehicle.id
    const lines = targetCsv.trimEnd().split('\r\n')
    const cells = lines.at(-1)!.split(',')
    cells[3] = String(Number(cells[3]) + 0.05)
    const text = [...lines.slice(0, -1), cells.join(',')].join('\r\n')
    const target = (
      await crew.tuner.call(bringTable, {
        params: { vehicleId: own },
        body: { kind: 'target', text, origin: 'paste', note: '', inEngine: false },
      })
    ).body
    const review = (await crew.reviewer.call(getReview, { params: { revisionId: target.id } })).body
    expect(review.lookFirst[0]).toMatchObject({ why: 'Leaner at high load' })
    expect(review.summary).toMatchObject({ changed: 1, leaner: 1, richer: 0, highLoadLeaner: 1 })
  })
})

describe('history', () => {
  test('tells what changed, from which revision, and where it branches', async () => {
    const { vehicle, ve } = await aVehicle(server, crew)
    const bring = async () => (await aRevision(crew, vehicle.id)).number
    // Revision 1 is in the engine, so both are made from it: the history branches there.
    expect([await bring(), await bring()]).toEqual([2, 3])
    const { entries } = (
      await crew.tuner.call(getHistory, { params: { vehicleId: vehicle.id }, query: { kind: 've' } })
    ).body
    const first = entries.find(({ revisionId }) => revisionId === ve.id)
    expect(first).toMatchObject({ parentNumber: null, childNumbers: [2, 3], changePct: null })
    const second = entries[1]!
    expect(second.parentNumber).toBe(1)
    expect(second.cols).toBe(flatbed.grid.rpm.length)
    expect(second.changePct!.flatMap((change, cell) => (change === 0 ? [] : [cell]))).toEqual([5, 40])
  })

  test('when an earlier revision is restored, then a new draft has its cells and the earlier one stays', async () => {
    const { vehicle, ve } = await aVehicle(server, crew)
    const later = (
      await crew.tuner.call(bringTable, {
        params: { vehicleId: vehicle.id },
        body: { kind: 've', text: changedCsv(), origin: 'paste', note: '', inEngine: true },
      })
    ).body
    const params = { revisionId: ve.id }
    const back = (await crew.tuner.call(restoreRevision, { params, body: { note: '' } })).body
    expect(back).toMatchObject({
      number: 3,
      state: 'draft',
      origin: 'restored',
      parentId: later.id,
      checksum: ve.checksum,
      cellsChanged: 2,
    })
    expect((await now(later)).checksum).toBe(later.checksum)
    expect((await crew.reviewer.call(restoreRevision, { params, body: { note: '' } })).status).toBe(403)
  })

  test('when the cells are those in use already, then there is nothing to restore', async () => {
    const { ve } = await aVehicle(server, crew)
    const answer = await crew.tuner.call(restoreRevision, { params: { revisionId: ve.id }, body: { note: '' } })
    expect(answer.status).toBe(409)
  })
})

test('no move leaves the database without its audit line', async () => {
  const revision = await aRevision(crew, vehicleId, 'signed')
  const { rows } = await server.deps.db.execute<{ action: string }>(
    sql`select action from audit_entries where facts->>'revisionId' = ${revision.id} order by id`,
  )
  expect(rows.map(({ action }) => action)).toEqual(['revision.make', 'revision.submit', 'revision.sign-off'])
})
