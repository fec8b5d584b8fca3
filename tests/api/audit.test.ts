/** The audit trail: narrowed by who, what, where and when; taken away as text that no spreadsheet runs. */
import Papa from 'papaparse'
import { afterAll, beforeAll, expect, test } from 'vitest'
import { exportAudit, listAudit } from '../../shared/contract/accounts.ts'
import { createVehicle } from '../../shared/contract/vehicles.ts'
import { aRevision } from '../support/revision.ts'
import { aWorkshop, startServer, type Crew, type TestServer } from '../support/server.ts'
import { aVehicle } from '../support/vehicle.ts'

let server: TestServer
let crew: Crew
let vehicleId: string
beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'audit')
  vehicleId = (await aVehicle(server, crew)).vehicle.id
  await aRevision(crew, vehicleId, 'signed')
})
afterAll(() => server.close())

const list = async (query: object) => (await crew.admin.call(listAudit, { query })).body.entries
const today = () => server.deps.clock.now().toISOString().slice(0, 10)

test('is narrowed by person, by action, by vehicle and by day, and by all of them at once', async () => {
  const all = await list({})
  const byReviewer = await list({ personId: crew.reviewer.id })
  expect(byReviewer.map(({ action }) => action)).toEqual(['revision.sign-off'])
  expect((await list({ action: 'revision.' })).every(({ action }) => action.startsWith('revision.'))).toBe(true)
  expect((await list({ vehicleId })).length).toBeLessThan(all.length)
  expect(await list({ from: today(), to: today() })).toHaveLength(all.length)
  expect(await list({ to: '2020-01-01' })).toEqual([])
  expect(await list({ from: '2999-01-01' })).toEqual([])
  expect(await list({ personId: crew.tuner.id, action: 'revision.submit', vehicleId, from: today() })).toHaveLength(1)
})

test('as CSV it has every entry, page after page, and the taking away is an entry itself', async () => {
  for (let i = 0; i < 110; i += 1)
    await crew.tuner.call(createVehicle, { body: { name: `Vehicle ${i}`, description: '' } })
  const file = await crew.reviewer.call(exportAudit, { query: {} })
  expect(file.headers.get('content-type')).toMatch(/text\/csv/)
  const rows = Papa.parse<string[]>(file.text.trimEnd()).data
  expect(rows[0]).toEqual(['Number', 'At', 'Who', 'Did', 'To what', 'Vehicle', 'Facts'])
  const numbers = rows.slice(1).map((row) => Number(row[0]))
  expect(numbers.length).toBeGreaterThan(110)
  expect(numbers).toEqual([...new Set(numbers)].sort((a, b) => b - a))
  expect(rows[1]![3]).toBe('audit.export')
  const signed = rows.find((row) => row[3] === 'revision.sign-off')!
  expect((JSON.parse(signed[6]!) as { checksum: string }).checksum).toMatch(/^[0-9a-f]{64}$/)
})

test('text that a spreadsheet would run stays text (OWASP, "CSV Injection": = + - @ and white space before them)', async () => {
  const names = ['=HYPERLINK("http://x.example","y")', '+1+1', '-1+1', '@SUM(A1)']
  for (const name of names) await crew.tuner.call(createVehicle, { body: { name, description: '' } })
  const file = await crew.admin.call(exportAudit, { query: { action: 'vehicle.create' } })
  const subjects = Papa.parse<string[]>(file.text.trimEnd()).data.map((row) => row[4]!)
  for (const name of names) expect(subjects).toContain(`'${name}`)
  for (const subject of subjects) expect(subject).not.toMatch(/^\s*[=+\-@]/)
})

test('is nobody’s who may not read it, and no other workshop’s', async () => {
  expect((await crew.tuner.call(exportAudit, { query: {} })).status).toBe(403)
  const away = await aWorkshop(server, 'audit-away')
  const text = (await away.admin.call(exportAudit, { query: {} })).text
  expect(text).not.toContain('revision.sign-off')
  expect((await away.admin.call(listAudit, { query: { vehicleId } })).body.entries).toEqual([])
})
