/** Makes the demo workshop once: people, vehicles, tables, and drives that go in by the same road as a person's. */
import { randomInt } from 'node:crypto'
import { existsSync, writeFileSync } from 'node:fs'
import { writeFile } from 'node:fs/promises'
import { join } from 'node:path'
import { demoVehicles, driveAgain, type DemoDrive, type DemoVehicle } from '../sample-logs/simulator/demo.ts'
import { toCsv } from '../sample-logs/simulator/simulate.ts'
import type { Role } from '../shared/access.ts'
import { readConfig } from './config.ts'
import { tableToCsv } from './core/formats/table-csv.ts'
import { buildDeps, closeDeps, type Deps } from './deps.ts'
import { addPerson, foundWorkshop, setupNeeded } from './features/accounts/service.ts'
import { receiveLog } from './features/logs/service.ts'
import { requestProposal } from './features/proposals/service.ts'
import { bringTable } from './features/tables/service.ts'
import { changeVehicle, createVehicle } from './features/vehicles/service.ts'
import { jobs } from './jobs.ts'
import type { Actor } from './platform/http/actor.ts'
import { drainQueue } from './platform/queue/run.ts'

interface SignIn {
  readonly role: string
  readonly name: string
  readonly email: string
  readonly password: string
}

const syllables = ['ash', 'birch', 'cedar', 'elm', 'fern', 'hazel', 'larch', 'maple', 'oak', 'pine', 'rowan', 'willow']
const newPassword = (): string =>
  Array.from({ length: 3 }, () => `${syllables[randomInt(12)]}${randomInt(100, 1000)}`).join('-')

const crew: readonly (Omit<SignIn, 'password' | 'role'> & { roles: Role[] })[] = [
  { roles: ['tuner', 'admin'], name: 'Mara Lindqvist', email: 'mara@larkfield.example' },
  { roles: ['owner'], name: 'Tom Hallam', email: 'tom@larkfield.example' },
  { roles: ['reviewer'], name: 'Idris Vaughan', email: 'idris@larkfield.example' },
]

async function people(deps: Deps, signIns: readonly SignIn[]): Promise<{ mara: Actor; tomId: string }> {
  const hashed = await Promise.all(
    signIns.map(async ({ name, email, password }) => ({
      name,
      email,
      passwordHash: await deps.crunch.hashPassword(password),
    })),
  )
  return deps.db.transaction(async (tx) => {
    const { workshopId, personId } = await foundWorkshop(tx, 'Larkfield Workshop', hashed[0]!, crew[0]!.roles, false)
    const tomId = await addPerson(tx, workshopId, hashed[1]!, crew[1]!.roles)
    await addPerson(tx, workshopId, hashed[2]!, crew[2]!.roles)
    const { name, email } = crew[0]!
    return { mara: { personId, name, email, workshopId, roles: crew[0]!.roles, sessionId: null }, tomId }
  })
}

const asCsv = (vehicle: DemoVehicle, values: Float64Array): string =>
  tableToCsv({ grid: vehicle.grid, values, axes: 'rpm-across', decimal: 'point', remarks: [] })

async function uploadDrive(deps: Deps, mara: Actor, vehicleId: string, vehicle: DemoVehicle, demo: DemoDrive) {
  const csv = toCsv(driveAgain(vehicle, demo))
  const path = join(deps.config.uploadDir, `seed-${demo.seed}.csv`)
  await writeFile(path, csv)
  const name = `${demo.recordedOn}-${demo.title.toLowerCase().replace(/[^a-z]+/g, '-')}.csv`
  return receiveLog(
    deps,
    mara,
    vehicleId,
    { name, path, bytes: Buffer.byteLength(csv) },
    { title: demo.title, recordedOn: demo.recordedOn },
  )
}

async function seedVehicle(deps: Deps, mara: Actor, ownerIds: string[], vehicle: DemoVehicle): Promise<void> {
  const { id, version } = await createVehicle(deps, mara, {
    name: vehicle.name,
    description: vehicle.description,
    sheet: vehicle.sheet,
  })
  await changeVehicle(deps, mara, id, { version, ownerIds })
  const table = { origin: 'seed', note: 'The table it came with' } as const
  await bringTable(deps, mara, id, { ...table, kind: 've', text: asCsv(vehicle, vehicle.flashed), inEngine: true })
  await bringTable(deps, mara, id, {
    ...table,
    kind: 'target',
    text: asCsv(vehicle, vehicle.target),
    note: '',
    inEngine: false,
  })
  const logs = []
  for (const demo of vehicle.drives) logs.push(await uploadDrive(deps, mara, id, vehicle, demo))
  await drainQueue(deps, jobs)
  // The cold yard log is left out, as a tuner would; one proposal waits on the workbench.
  const chosen = logs.filter((_, i) => vehicle.drives[i]!.habit !== 'yard').map((log) => log.id)
  await requestProposal(deps, mara, id, { logIds: chosen, stepCapPct: 20 })
  await drainQueue(deps, jobs)
}

async function seed(deps: Deps): Promise<void> {
  const path = join(deps.config.dataDir, 'demo.json')
  if (!(await setupNeeded(deps))) return
  const signIns = crew.map(({ roles, name, email }) => ({ role: roles[0]!, name, email, password: newPassword() }))
  const { mara, tomId } = await people(deps, signIns)
  writeFileSync(path, JSON.stringify(signIns, null, 2), { mode: 0o600 })
  const [flatbed, turbo] = demoVehicles
  await seedVehicle(deps, mara, [tomId], flatbed!)
  await seedVehicle(deps, mara, [], turbo!)
}

const deps = buildDeps(readConfig(process.env))
await seed(deps)
await closeDeps(deps)
if (!existsSync(join(deps.config.dataDir, 'demo.json'))) deps.log.info('this database was not seeded here')
