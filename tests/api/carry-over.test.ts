/** Two proposals from one revision: the second is told what has moved, and nothing of either is lost. */
import { afterAll, beforeAll, expect, test } from 'vitest'
import {
  carryOver,
  decideCells,
  getMoved,
  getProposal,
  makeRevision,
  requestProposal,
  type Proposal,
} from '../../shared/contract/proposals.ts'
import { getReview } from '../../shared/contract/reviews.ts'
import { bringTable, getRevision, type Revision } from '../../shared/contract/tables.ts'
import { aRevision } from '../support/revision.ts'
import { aWorkshop, startServer, type Crew, type TestServer } from '../support/server.ts'
import { aVehicle } from '../support/vehicle.ts'

let server: TestServer
let crew: Crew
beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'carry')
})
afterAll(() => server.close())

const decide = async (proposal: Proposal, byHand: Record<number, number>) =>
  (
    await crew.tuner.call(decideCells, {
      params: { proposalId: proposal.id },
      body: {
        version: proposal.version,
        cells: Object.entries(byHand).map(([cell, value]) => ({
          cell: Number(cell),
          decision: 'by-hand' as const,
          value,
        })),
      },
    })
  ).body

/** Two open proposals from revision 1; the first decided cells 0 to 2 and became revision 2, the second cells 1 to 3. */
async function branched() {
  const { vehicle, ve, log } = await aVehicle(server, crew, { log: true })
  const params = { vehicleId: vehicle.id }
  const request = () => crew.tuner.call(requestProposal, { params, body: { logIds: [log!.id], stepCapPct: 20 } })
  const ids = [(await request()).body.id, (await request()).body.id]
  await server.drain()
  const [one, two] = await Promise.all(
    ids.map(async (proposalId) => (await crew.tuner.call(getProposal, { params: { proposalId } })).body),
  )
  const decided = await decide(one!, { 0: 51, 1: 52, 2: 53 })
  const first = (
    await crew.tuner.call(makeRevision, {
      params: { proposalId: one!.id },
      body: { version: decided.version, note: 'first' },
    })
  ).body
  return { vehicleId: vehicle.id, base: ve, first, second: await decide(two!, { 1: 55, 2: 53, 3: 54 }) }
}

const carry = (
  proposal: Proposal,
  onto: Revision,
  answers: { cell: number; take: 'mine' | 'theirs' }[],
  version = proposal.version,
) =>
  crew.tuner.call(carryOver, {
    params: { proposalId: proposal.id },
    body: { version, ontoId: onto.id, answers, note: 'carried' },
  })

test('what moved is told cell by cell, and the draft holds both, with an answer where both decided', async () => {
  const { base, first, second } = await branched()
  const params = { proposalId: second.id }
  expect(second.overtakenBy?.number).toBe(2)
  const moved = (await crew.reviewer.call(getMoved, { params })).body
  expect(moved.onto).toMatchObject({ id: first.id, number: 2, author: crew.tuner.name })
  expect(moved.contested).toMatchObject([{ cell: 1, base: base.values[1], theirs: 52, mine: 55 }])
  expect(moved.theirsOnly.map(({ cell }) => cell)).toEqual([0, 2])
  expect(moved.mineOnly.map(({ cell }) => cell)).toEqual([3])

  const unanswered = await carry(second, first, [])
  expect(unanswered.status).toBe(422)
  expect(unanswered.problem?.detail).toMatch(/1 contested cells have no answer/)
  const late = await carry(second, first, [{ cell: 1, take: 'mine' }], second.version - 1)
  expect(late.problem?.type).toMatch(/changed-meanwhile$/)

  const carried = (await carry(second, first, [{ cell: 1, take: 'mine' }])).body
  expect(carried).toMatchObject({ number: 3, parentId: first.id, state: 'draft', cellsChanged: 2 })
  expect(carried.values.slice(0, 4)).toEqual([51, 55, 53, 54])
  expect(carried.values.slice(4)).toEqual(base.values.slice(4))
  expect(carried.provenance?.decision.slice(0, 5)).toEqual(['none', 'by-hand', 'none', 'by-hand', 'none'])
  expect(carried.settings).toMatchObject({ carriedOnto: first.checksum })
  expect((await crew.tuner.call(getProposal, { params })).body).toMatchObject({
    state: 'revised',
    revisionId: carried.id,
  })
  expect((await crew.tuner.call(getRevision, { params: { revisionId: first.id } })).body.checksum).toBe(first.checksum)
})

test('an answer for the other side takes its value', async () => {
  const { first, second } = await branched()
  const carried = (await carry(second, first, [{ cell: 1, take: 'theirs' }])).body
  expect(carried.values.slice(0, 4)).toEqual([51, 52, 53, 54])
})

test('when a still later revision appears, then carrying over is told and not done on the wrong one', async () => {
  const { vehicleId, first, second } = await branched()
  await aRevision(crew, vehicleId)
  const answer = await carry(second, first, [{ cell: 1, take: 'mine' }])
  expect(answer.problem?.type).toMatch(/changed-meanwhile$/)
  expect(answer.problem?.detail).toMatch(/Revision 3 has been made/)
})

test('when two carry the same proposal over at once, then one draft is made and the other is told', async () => {
  const { first, second } = await branched()
  const both = await Promise.all([1, 2].map(() => carry(second, first, [{ cell: 1, take: 'mine' }])))
  expect(both.map(({ status }) => status).sort((a, b) => a - b)).toEqual([200, 409])
})

test('when the later revision has other axes, then nothing is carried over', async () => {
  const { vehicleId, second } = await branched()
  const other = (
    await crew.tuner.call(bringTable, {
      params: { vehicleId },
      body: {
        kind: 've',
        text: 'kPa \\ rpm,1000,2000\r\n40,50,55\r\n100,80,85\r\n',
        origin: 'paste',
        note: '',
        inEngine: false,
      },
    })
  ).body
  const moved = (await crew.tuner.call(getMoved, { params: { proposalId: second.id } })).body
  expect(moved).toMatchObject({ sameAxes: false, contested: [], onto: { id: other.id } })
  expect((await carry(second, other, [])).problem?.detail).toMatch(/other axes/)
})

test('when the revision is made beside the other all the same, then its reviewer is told of the branch', async () => {
  const { first, second } = await branched()
  const beside = (
    await crew.tuner.call(makeRevision, {
      params: { proposalId: second.id },
      body: { version: second.version, note: '' },
    })
  ).body
  const review = (await crew.reviewer.call(getReview, { params: { revisionId: beside.id } })).body
  expect(review.beside).toEqual([{ id: first.id, number: 2 }])
})
