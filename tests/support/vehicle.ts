/** A vehicle with its tables and a short simulated drive, made through the API as a tuner would. */
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { toCsv } from '../../sample-logs/simulator/simulate.ts'
import { tableToCsv } from '../../server/core/formats/table-csv.ts'
import { uploadLog } from '../../shared/contract/logs.ts'
import { bringTable } from '../../shared/contract/tables.ts'
import { changeVehicle, createVehicle } from '../../shared/contract/vehicles.ts'
import type { Crew, TestServer } from './server.ts'
import { flatbedLog } from './drives.ts'

export const veCsv = tableToCsv({
  grid: flatbed.grid,
  values: flatbed.flashed,
  axes: 'rpm-across',
  decimal: 'point',
  remarks: [],
})
export const targetCsv = tableToCsv({
  grid: flatbed.grid,
  values: flatbed.target,
  axes: 'rpm-across',
  decimal: 'point',
  remarks: [],
})

let drive: string | null = null
/** Five minutes on the road, warm. */
export function driveCsv(): string {
  drive ??= toCsv(flatbedLog(7))
  return drive
}

export async function aVehicle(server: TestServer, crew: Crew, options: { log?: boolean } = {}) {
  const { tuner, owner } = crew
  const vehicle = (
    await tuner.call(createVehicle, { body: { name: 'Test flatbed', description: '', sheet: flatbed.sheet } })
  ).body
  await tuner.call(changeVehicle, {
    params: { vehicleId: vehicle.id },
    body: { version: vehicle.version, ownerIds: [owner.id] },
  })
  const params = { vehicleId: vehicle.id }
  const ve = (
    await tuner.call(bringTable, {
      params,
      body: { kind: 've', text: veCsv, origin: 'paste', note: '', inEngine: true },
    })
  ).body
  const target = (
    await tuner.call(bringTable, {
      params,
      body: { kind: 'target', text: targetCsv, origin: 'paste', note: '', inEngine: false },
    })
  ).body
  if (!options.log) return { vehicle, ve, target, log: null }
  const log = (
    await tuner.call(uploadLog, {
      params,
      body: { title: 'A test drive' },
      file: { name: 'drive.csv', content: driveCsv() },
    })
  ).body
  await server.drain()
  return { vehicle, ve, target, log }
}
