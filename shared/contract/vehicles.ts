/** Vehicles and their engine sheets. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { Id, Instant } from '../wire.ts'

const positive = (what: string, max: number) =>
  z.number().positive(`${what} must be above 0`).max(max, `${what} above ${max} cannot be right`)

/** What the maths needs of the engine. Stored in the units named here; shown in the person's own. */
export const EngineSheetInput = z.strictObject({
  displacementL: positive('Displacement', 30),
  cylinders: z.number().int().min(1).max(16),
  boosted: z.boolean(),
  revLimitRpm: z.number().min(1000, 'A rev limit below 1000 rpm cannot be right').max(20000),
  injectorFlowCcMin: positive('Injector flow', 5000),
  injectorPressureKpa: z.number().min(30).max(1500),
  deadTimeMs: z
    .number()
    .min(0)
    .max(4, 'A dead time above 4 ms is longer than a cycle allows; did you mean a tenth of it?'),
  fuel: z.enum(['petrol', 'e5', 'e10', 'e85', 'ethanol', 'methanol', 'lpg', 'custom']),
  stoichAfr: z.number().min(5).max(20),
  fuelDensityGPerCc: z.number().min(0.4).max(1.1),
  lambdaLow: z.number().min(0.4).max(0.95),
  lambdaHigh: z.number().min(1.05).max(10),
})
export type EngineSheetInput = z.infer<typeof EngineSheetInput>

export const EngineSheet = EngineSheetInput.extend({
  id: Id,
  number: z.number().int(),
  createdAt: Instant,
  author: z.string(),
})
export type EngineSheet = z.infer<typeof EngineSheet>

export const VehicleInput = z.strictObject({
  name: z.string().trim().min(1, 'A vehicle needs a name').max(80),
  description: z.string().trim().max(400).default(''),
})

/** 0 none, else log-seconds: the evidence patch that stands for the vehicle in lists. */
export const EvidencePatch = z.object({ rows: z.number(), cols: z.number(), seconds: z.array(z.number().nullable()) })

export const Vehicle = z.object({
  id: Id,
  name: z.string(),
  description: z.string(),
  createdAt: Instant,
  archived: z.boolean(),
  owners: z.array(z.object({ id: Id, name: z.string() })),
  sheet: EngineSheet.nullable(),
  /** The fuel-table revision that is in the engine now. */
  flashedRevisionId: Id.nullable(),
  version: z.number().int(),
})
export type Vehicle = z.infer<typeof Vehicle>

export const VehicleRef = z.strictObject({ vehicleId: Id })

export const listVehicles = endpoint({
  method: 'GET',
  path: '/api/vehicles',
  access: 'vehicle:read',
  summary: 'Vehicles you may see',
  response: z.object({ vehicles: z.array(Vehicle) }),
})
export const createVehicle = endpoint({
  method: 'POST',
  path: '/api/vehicles',
  access: 'vehicle:edit',
  summary: 'Add a vehicle, with or without its engine sheet',
  body: VehicleInput.extend({ sheet: EngineSheetInput.optional() }),
  response: Vehicle,
})
export const getVehicle = endpoint({
  method: 'GET',
  path: '/api/vehicles/:vehicleId',
  access: 'vehicle:read',
  summary: 'One vehicle with its current engine sheet',
  params: VehicleRef,
  response: Vehicle,
})
export const changeVehicle = endpoint({
  method: 'PATCH',
  path: '/api/vehicles/:vehicleId',
  access: 'vehicle:edit',
  summary: 'Rename, describe, archive, or set the owners',
  params: VehicleRef,
  body: z.strictObject({
    version: z.number().int(),
    name: z.string().trim().min(1).max(80).optional(),
    description: z.string().trim().max(400).optional(),
    archived: z.boolean().optional(),
    ownerIds: z.array(Id).max(50).optional(),
  }),
  response: Vehicle,
})
export const writeEngineSheet = endpoint({
  method: 'PUT',
  path: '/api/vehicles/:vehicleId/engine-sheet',
  access: 'vehicle:edit',
  summary: 'Write the engine sheet anew; earlier writings stay with the logs taken under them',
  params: VehicleRef,
  body: EngineSheetInput,
  response: EngineSheet,
})
