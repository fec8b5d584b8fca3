/** Logs that add up on the server: switched off and on without a second look at their samples, replayed, and looked into. */
import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { toCsv } from '../../sample-logs/simulator/simulate.ts'
import { logMemories } from '../../server/platform/db/schema/proposals.ts'
import { uploadLog } from '../../shared/contract/logs.ts'
import {
  chooseLogs,
  decideCells,
  getCellSamples,
  getProposal,
  replayDrive,
  requestProposal,
  type Proposal,
} from '../../shared/contract/proposals.ts'
import { aWorkshop, startServer, type Crew, type TestServer } from '../support/server.ts'
import { aVehicle } from '../support/vehicle.ts'
import { flatbedLog } from '../support/drives.ts'

let server: TestServer
let crew: Crew
let logIds: string[]
let proposal: Proposal & { surface: NonNullable<Proposal['surface']> }

beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'learning')
  const { vehicle, log } = await aVehicle(server, crew, { log: true })
  const second = toCsv(flatbedLog(8, { habit: 'track' }))
  const params = { vehicleId: vehicle.id }
  const other = (
    await crew.tuner.call(uploadLog, {
      params,
      body: { title: 'Another' },
      file: { name: 'b.csv', content: second },
    })
  ).body
  await server.drain()
  logIds = [log!.id, other.id]
  const asked = (await crew.tuner.call(requestProposal, { params, body: { logIds, stepCapPct: 20 } })).body
  await server.drain()
  proposal = await fetchProposal(asked.id)
}, 60_000)
afterAll(() => server.close())

async function fetchProposal(id: string): Promise<typeof proposal> {
  const { body } = await crew.tuner.call(getProposal, { params: { proposalId: id } })
  if (!body.surface) throw new Error(body.trouble ?? body.state)
  return { ...body, surface: body.surface }
}

async function choose(ids: string[]): Promise<typeof proposal> {
  const params = { proposalId: proposal.id }
  const { version } = await fetchProposal(proposal.id)
  const { body, status } = await crew.tuner.call(chooseLogs, { params, body: { version, logIds: ids } })
  expect(status).toBe(200)
  return { ...body, surface: body.surface! }
}

describe('logs add up', () => {
  test('when a log is switched off and on again, then every number of the surface is as before', async () => {
    const before = proposal.surface
    const without = await choose([logIds[0]!])
    expect(without.logs.map((log) => log.used)).toEqual([true, false])
    expect(without.surface.fitted).not.toEqual(before.fitted)
    expect(without.surface.logs).toHaveLength(1)
    expect((await choose(logIds)).surface).toEqual(before)
  })

  test('when logs are switched, then what was learned of each is used again, not learned again', async () => {
    const stamps = () =>
      server.deps.db
        .select({ at: logMemories.createdAt, key: logMemories.key })
        .from(logMemories)
        .orderBy(logMemories.logId)
    const before = await stamps()
    expect(before).toHaveLength(2)
    await choose([logIds[1]!])
    await choose(logIds)
    expect(await stamps()).toEqual(before)
  })

  test('when a log that alone knew a cell is switched off, then the accepted cell keeps its value, other decisions stay', async () => {
    const alone = (await choose([logIds[0]!])).surface
    const both = await choose(logIds)
    const lost = both.surface.evidenceS.findIndex((s, cell) => (s ?? 0) > 0 && (alone.evidenceS[cell] ?? 0) === 0)
    const stays = alone.evidenceS.findIndex((s) => (s ?? 0) > 0)
    expect(lost).toBeGreaterThanOrEqual(0)
    const params = { proposalId: proposal.id }
    await crew.tuner.call(decideCells, {
      params,
      body: { version: both.version, cells: [lost, stays].map((cell) => ({ cell, decision: 'accepted' as const })) },
    })
    const after = await choose([logIds[0]!])
    expect(after.decisions[lost]).toBe('kept')
    expect(after.decisions[stays]).toBe('accepted')
    expect((await choose(logIds)).decisions[lost]).toBe('open')
  })

  test('when somebody decided meanwhile, then switching is refused and nothing changes', async () => {
    const now = await fetchProposal(proposal.id)
    const { status, problem } = await crew.tuner.call(chooseLogs, {
      params: { proposalId: proposal.id },
      body: { version: now.version - 1, logIds: [logIds[0]!] },
    })
    expect([status, problem?.title]).toEqual([409, 'Somebody changed this while you were looking at it'])
    expect(await fetchProposal(proposal.id)).toEqual(now)
  })

  test('when a log is not the proposal’s, then it is not found', async () => {
    const { version } = await fetchProposal(proposal.id)
    const { status } = await crew.tuner.call(chooseLogs, {
      params: { proposalId: proposal.id },
      body: { version, logIds: [proposal.id] },
    })
    expect(status).toBe(404)
  })

  test('when the memory of a log was taken on other ground, then it is learned again and the answer is the same', async () => {
    const before = await choose(logIds)
    await server.deps.db.update(logMemories).set({ key: 'stale' }).where(eq(logMemories.logId, logIds[0]!))
    await choose([logIds[1]!])
    expect((await choose(logIds)).surface).toEqual(before.surface)
  })
})

describe('looking closer', () => {
  test('when a drive is replayed, then the model explains it and the proposed table brings it nearer to its target', async () => {
    const params = { proposalId: proposal.id }
    const { body } = await crew.tuner.call(replayDrive, {
      params,
      query: { logId: logIds[0]!, table: 'proposed', points: 2000 },
    })
    const pairs = body.timeS.flatMap((_, i) => {
      const [measured, explained] = [body.measured[i], body.explained[i]]
      return measured && explained && measured < 1.3 && measured > 0.7 ? [Math.abs(Math.log(measured / explained))] : []
    })
    const median = pairs.toSorted((a, b) => a - b)[pairs.length >> 1]!
    expect(pairs.length).toBeGreaterThan(1000)
    expect(median).toBeLessThan(0.015)
    expect(body.onTarget.predicted).toBeGreaterThan(body.onTarget.measured)
    const current = await crew.tuner.call(replayDrive, { params, query: { logId: logIds[0]!, table: 'current' } })
    expect(current.body.onTarget.predicted).toBeLessThan(body.onTarget.predicted)
  })

  test('when a stretch is asked for, then only it comes, thinned to the points asked for', async () => {
    const { body } = await crew.reviewer.call(replayDrive, {
      params: { proposalId: proposal.id },
      query: { logId: logIds[0]!, fromS: 100, toS: 160, points: 200 },
    })
    expect(body.timeS.length).toBeGreaterThan(100)
    expect(body.timeS.length).toBeLessThanOrEqual(200)
    expect(Math.min(...body.timeS)).toBeGreaterThanOrEqual(100)
    expect(Math.max(...body.timeS)).toBeLessThanOrEqual(160)
  })

  test('when a cell’s readings are asked for, then each lies beside the cell and their mean is near the fit', async () => {
    const { surface } = await fetchProposal(proposal.id)
    const cell = surface.evidenceS.reduce(
      (best: number, s, i) => ((s ?? 0) > (surface.evidenceS[best] ?? 0) ? i : best),
      0,
    )
    const { body } = await crew.tuner.call(getCellSamples, { params: { proposalId: proposal.id, cell } })
    expect(body.samples.length).toBeGreaterThan(50)
    const { rpm, mapKpa } = surface.grid
    const col = cell % rpm.length
    const row = Math.floor(cell / rpm.length)
    for (const sample of body.samples) {
      expect(sample.share).toBeGreaterThanOrEqual(0.1)
      if (col > 0 && col + 1 < rpm.length) {
        expect(sample.rpm).toBeGreaterThan(rpm[col - 1]!)
        expect(sample.rpm).toBeLessThan(rpm[col + 1]!)
      }
      if (row > 0 && row + 1 < mapKpa.length) {
        expect(sample.mapKpa).toBeGreaterThan(mapKpa[row - 1]!)
        expect(sample.mapKpa).toBeLessThan(mapKpa[row + 1]!)
      }
    }
    const mean = body.samples.reduce((sum, sample) => sum + sample.ve, 0) / body.samples.length
    expect(mean / surface.fitted[cell]!).toBeCloseTo(1, 1)
  })
})

test('when the intake sensor of a log is dead, then nothing is said of the injectors on its −40 °C', async () => {
  const { vehicle } = await aVehicle(server, crew)
  const params = { vehicleId: vehicle.id }
  const learn = async (title: string, extra: Parameters<typeof flatbedLog>[1]) => {
    const log = (
      await crew.tuner.call(uploadLog, {
        params,
        body: { title },
        file: { name: `${title}.csv`, content: toCsv(flatbedLog(9, extra)) },
      })
    ).body
    await server.drain()
    const asked = await crew.tuner.call(requestProposal, { params, body: { logIds: [log.id], stepCapPct: 20 } })
    await server.drain()
    return (await fetchProposal(asked.body.id)).surface
  }
  const dead = await learn('dead', { dead: 'iat' })
  expect(dead.diagnoses.map(({ kind }) => kind)).not.toContain('injector-flow')
  expect(dead.byPulse.every((value) => value === null)).toBe(true)
  const sound = await learn('sound', {})
  const cell = sound.evidenceS.findIndex((seconds) => (seconds ?? 0) > 3)
  expect(sound.byPulse[cell]! / sound.fitted[cell]!).toBeCloseTo(1, 1)
})
