/** Drive logs: upload, state, mapping, health, traces. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { logStates } from '../lifecycle.ts'
import { Done, GridShape, Id, Instant, Numbers } from '../wire.ts'
import { VehicleRef } from './vehicles.ts'

/** Channels that Evenburn knows; a column may also be left unused. */
export const channelNames = [
  'time',
  'rpm',
  'map',
  'lambda',
  'targetLambda',
  'ect',
  'iat',
  'tp',
  'trim',
  'warmup',
  'afterStart',
  'accel',
  'pulseWidth',
  'battery',
  'baro',
] as const
export const ChannelName = z.enum(channelNames)
export type ChannelName = z.infer<typeof ChannelName>

export const ColumnMapping = z.object({
  index: z.number().int(),
  header: z.string(),
  unit: z.string(),
  channel: ChannelName.nullable(),
  /** 0 to 1. */
  confidence: z.number(),
  reason: z.string(),
})
export type ColumnMapping = z.infer<typeof ColumnMapping>

export const ChannelHealth = z.object({
  channel: ChannelName,
  state: z.enum(['dead', 'caution', 'sound', 'absent']),
  unit: z.string(),
  lowest: z.number().nullable(),
  median: z.number().nullable(),
  highest: z.number().nullable(),
  remark: z.string(),
})
export type ChannelHealth = z.infer<typeof ChannelHealth>

export const ReadFault = z.object({
  kind: z.string(),
  count: z.number().int(),
  examples: z.array(z.object({ line: z.number().int(), text: z.string() })),
})
export type ReadFault = z.infer<typeof ReadFault>

export const LogLine = z.object({
  id: Id,
  vehicleId: Id,
  number: z.number().int(),
  title: z.string(),
  fileName: z.string(),
  bytes: z.number().int(),
  sha256: z.string(),
  state: z.enum(logStates),
  /** 0 to 1 while it is read. */
  progress: z.number(),
  /** What went wrong, in words, when rejected or failed. */
  trouble: z.string().nullable(),
  rows: z.number().int(),
  durationS: z.number(),
  rateHz: z.number(),
  recordedOn: z.iso.date().nullable(),
  uploadedAt: Instant,
  uploadedBy: z.string(),
  /** The fuel-table revision in the engine when it was recorded. */
  flashedRevision: z.object({ id: Id, number: z.number().int() }).nullable(),
  worstHealth: z.enum(['dead', 'caution', 'sound', 'absent']).nullable(),
})
export type LogLine = z.infer<typeof LogLine>

export const Log = LogLine.extend({
  mapping: z.array(ColumnMapping),
  health: z.array(ChannelHealth),
  faults: z.array(ReadFault),
  channels: z.array(ChannelName),
  note: z.string(),
  version: z.number().int(),
})
export type Log = z.infer<typeof Log>

export const LogRef = z.strictObject({ logId: Id })

export const Trace = z.object({
  channel: ChannelName,
  unit: z.string(),
  /** Bucket starts in seconds, and the lowest and highest reading in each bucket. */
  timeS: z.array(z.number()),
  low: Numbers,
  high: Numbers,
})
export type Trace = z.infer<typeof Trace>

export const findingKinds = [
  'stall',
  'hunting',
  'rich-surge',
  'tip-in',
  'lean-load',
  'rich-load',
  'cut-missing',
  'cut-stays',
  'closed-loop',
  'dropouts',
  'misfire',
  'warm-up',
  'heat-soak',
  'leak',
  'dead-time',
] as const

/** Seconds from the start of the log. */
export const Stretch = z.object({ fromS: z.number(), toS: z.number() })
export type Stretch = z.infer<typeof Stretch>

/** Where the engine misbehaved: what was seen, and what it usually means by common practice. */
export const Finding = z.object({
  kind: z.enum(findingKinds),
  /** stop: do not drive it so; look: wants mending; note: good to know. */
  urgency: z.enum(['stop', 'look', 'note']),
  title: z.string(),
  usually: z.string(),
  times: z.number().int(),
  /** In the order of time, at most twenty. */
  stretches: z.array(Stretch),
  numbers: z.array(z.object({ label: z.string(), value: z.number(), unit: z.string() })),
  /** Cells of the inspection's grid it happened in, the most visited first. */
  cells: z.array(z.number().int()),
})
export type Finding = z.infer<typeof Finding>

export const Histogram = z.object({
  channel: ChannelName,
  unit: z.string(),
  low: z.number(),
  high: z.number(),
  /** Seconds in each of equally wide bins from low to high. */
  seconds: z.array(z.number()),
})
export type Histogram = z.infer<typeof Histogram>

/** What is worked out from the whole log at once. */
export const Inspection = z.object({
  findings: z.array(Finding),
  /** Stretches that cannot teach, with their reason; null where no fuel table is known that was in the engine. */
  leftOut: z.array(Stretch.extend({ reason: z.string() })).nullable(),
  /** Seconds that the drive spent nearest to each cell of the fuel table. */
  path: z.object({ grid: GridShape, seconds: z.array(z.number()) }).nullable(),
  histograms: z.array(Histogram),
})
export type Inspection = z.infer<typeof Inspection>

export const uploadLog = endpoint({
  method: 'POST',
  path: '/api/vehicles/:vehicleId/logs',
  access: 'log:upload',
  summary: 'Upload a drive log (CSV) as multipart field "file"; it is read in the background',
  params: VehicleRef,
  bodyKind: 'upload',
  body: z.strictObject({
    title: z.string().trim().max(80).default(''),
    recordedOn: z.iso.date().optional(),
    flashedRevisionId: Id.optional(),
  }),
  response: LogLine,
})
export const listLogs = endpoint({
  method: 'GET',
  path: '/api/vehicles/:vehicleId/logs',
  access: 'log:read',
  summary: 'Logs of the vehicle, newest first',
  params: VehicleRef,
  response: z.object({ logs: z.array(LogLine) }),
})
export const getLog = endpoint({
  method: 'GET',
  path: '/api/logs/:logId',
  access: 'log:read',
  summary: 'One log with its mapping, health and reading faults',
  params: LogRef,
  response: Log,
})
export const changeLog = endpoint({
  method: 'PATCH',
  path: '/api/logs/:logId',
  access: 'log:upload',
  summary: 'Title, note, day, or the revision that was in the engine',
  params: LogRef,
  body: z.strictObject({
    version: z.number().int(),
    title: z.string().trim().min(1).max(80).optional(),
    note: z.string().max(2000).optional(),
    recordedOn: z.iso.date().nullable().optional(),
    flashedRevisionId: Id.nullable().optional(),
  }),
  response: Log,
})
export const mapColumns = endpoint({
  method: 'PUT',
  path: '/api/logs/:logId/mapping',
  access: 'log:upload',
  summary: 'Say what the columns are; the log is read again from the kept original',
  params: LogRef,
  body: z.strictObject({
    columns: z
      .array(
        z.strictObject({ index: z.number().int().min(0), channel: ChannelName.nullable(), unit: z.string().max(20) }),
      )
      .max(500),
  }),
  response: Log,
})
export const readLogAgain = endpoint({
  method: 'POST',
  path: '/api/logs/:logId/readings',
  access: 'log:upload',
  summary: 'Read the kept original again after a failure',
  params: LogRef,
  response: Log,
})
export const getTraces = endpoint({
  method: 'GET',
  path: '/api/logs/:logId/traces',
  access: 'log:read',
  summary: 'Lowest and highest readings in equal stretches of time, for plotting',
  params: LogRef,
  query: z.strictObject({
    channels: z.string().max(300),
    fromS: z.coerce.number().optional(),
    toS: z.coerce.number().optional(),
    points: z.coerce.number().int().min(10).max(4000).default(1000),
  }),
  response: z.object({ traces: z.array(Trace) }),
})
export const inspectLog = endpoint({
  method: 'GET',
  path: '/api/logs/:logId/inspection',
  access: 'log:read',
  summary: 'Findings, stretches that cannot teach, time spent in each cell, and a histogram of every channel',
  params: LogRef,
  response: Inspection,
})
export const downloadLog = endpoint({
  method: 'GET',
  path: '/api/logs/:logId/original',
  access: 'log:read',
  summary: 'The file as it was uploaded',
  params: LogRef,
  produces: 'text/csv',
})
export const removeLog = endpoint({
  method: 'DELETE',
  path: '/api/logs/:logId',
  access: 'log:upload',
  summary: 'Remove a log that no revision was learned from',
  params: LogRef,
  response: Done,
})
