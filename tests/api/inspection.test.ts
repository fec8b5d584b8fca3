/** A log looked over through the API, against the rows that were uploaded. */
import { afterAll, beforeAll, expect, test } from 'vitest'
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { inspectLog, uploadLog } from '../../shared/contract/logs.ts'
import { aWorkshop, startServer, type Crew, type TestServer } from '../support/server.ts'
import { aVehicle, driveCsv } from '../support/vehicle.ts'

let server: TestServer
let crew: Crew
let vehicleId: string
let logId: string
const seconds = 300

beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'home')
  const made = await aVehicle(server, crew, { log: true })
  vehicleId = made.vehicle.id
  logId = made.log!.id
})
afterAll(() => server.close())

test('when a log is inspected, then path, histograms and left-out stretches add up to its length', async () => {
  const { status, body } = await crew.tuner.call(inspectLog, { params: { logId } })
  expect(status).toBe(200)
  expect(body.path!.grid).toEqual(flatbed.grid)
  const sum = (values: readonly number[]) => values.reduce((total, value) => total + value, 0)
  expect(sum(body.path!.seconds)).toBeCloseTo(seconds, 0)
  for (const each of body.histograms) expect(sum(each.seconds)).toBeCloseTo(seconds, 0)
  const cut = body.leftOut!.filter(({ reason }) => reason === 'fuel cut')
  const rows = driveCsv().trim().split('\n')
  const pulse = rows[0]!.split(',').indexOf('Pulse width (ms)')
  const cutS = rows.filter((row) => row.split(',')[pulse] === '0').length / 20
  expect(Math.abs(sum(cut.map(({ fromS, toS }) => toS - fromS)) - cutS)).toBeLessThan(0.5)
})

test('when a log is lean under load, then that is said first, with cells of the table', async () => {
  const rows = driveCsv().trim().split('\n')
  const title = rows[0]!.split(',')
  const [map, lambda] = [title.indexOf('MAP (kPa)'), title.indexOf('Lambda')]
  const lean = rows.map((row, i) => {
    const cells = row.split(',')
    if (i > 0 && Number(cells[map]) > 86) cells[lambda] = '1.12'
    return cells.join(',')
  })
  const log = await crew.tuner.call(uploadLog, {
    params: { vehicleId },
    body: { title: 'Lean' },
    file: { name: 'lean.csv', content: lean.join('\n') },
  })
  await server.drain()
  const { body } = await crew.tuner.call(inspectLog, { params: { logId: log.body.id } })
  expect(body.findings[0]!.kind).toBe('lean-load')
  expect(body.findings[0]!.cells.length).toBeGreaterThan(0)
  const cols = flatbed.grid.rpm.length
  for (const cell of body.findings[0]!.cells)
    expect(flatbed.grid.mapKpa[Math.floor(cell / cols)]).toBeGreaterThanOrEqual(81)
})

test('when the log has not been read yet, then 409 says so', async () => {
  const log = await crew.tuner.call(uploadLog, {
    params: { vehicleId },
    body: { title: 'Unread' },
    file: { name: 'unread.csv', content: `${driveCsv()}\n` },
  })
  const { status } = await crew.tuner.call(inspectLog, { params: { logId: log.body.id } })
  expect(status).toBe(409)
})
