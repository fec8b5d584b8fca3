/** Reading a log in the background: the kept original through the thread pool into channel blocks, health and mapping. */
import { randomUUID } from 'node:crypto'
import { createWriteStream } from 'node:fs'
import { unlink } from 'node:fs/promises'
import { join } from 'node:path'
import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import { eq } from 'drizzle-orm'
import { z } from 'zod'
import type { ColumnMapping } from '../../../shared/contract/logs.ts'
import type { LogColumns } from '../../core/csv/read-log.ts'
import { channelHealth } from '../../core/channels/health.ts'
import { missingChannels, recogniseColumns, toChannels } from '../../core/channels/recognise.ts'
import type { Deps } from '../../deps.ts'
import { openDb } from '../../platform/db/client.ts'
import { logBlocks } from '../../platform/db/schema/logs.ts'
import type { JobDefinition } from '../../platform/queue/run.ts'
import { tell } from '../notices/service.ts'
import { currentSheet, vehicleById } from '../vehicles/service.ts'
import { writeChannels } from './columns.ts'
import { originalPieces } from './originals.ts'
import { headerHashOf } from './service.ts'
import * as store from './store.ts'

const Payload = z.object({ logId: z.string() })

async function readOriginal(deps: Deps, logId: string, signal: AbortSignal) {
  const path = join(deps.config.uploadDir, `reading-${randomUUID()}`)
  try {
    await pipeline(Readable.from(originalPieces(deps.db, logId)), createWriteStream(path, { mode: 0o600 }))
    return await deps.crunch.readLogFile(path, true, signal)
  } finally {
    await unlink(path).catch(() => undefined)
  }
}

/** What the columns are: as a person said, as remembered for such a header, else as recognised. */
async function mappingOf(
  deps: Deps,
  log: store.LogRow,
  reading: LogColumns,
  stoichAfr: number,
): Promise<ColumnMapping[]> {
  if (log.mappingSetBy && log.mapping.length === reading.header.length) return log.mapping
  const guessed = recogniseColumns(reading.header, reading.units, reading.columns, stoichAfr)
  const remembered = await store.rememberedMapping(deps.db, log.vehicleId, headerHashOf(reading.header))
  if (!remembered) return guessed
  return guessed.map((column) => {
    const known = remembered.find((each) => each.index === column.index)
    return known
      ? {
          ...column,
          channel: known.channel as ColumnMapping['channel'],
          unit: known.unit,
          confidence: 1,
          reason: 'As said for an earlier log of this vehicle',
        }
      : column
  })
}

async function readLog(deps: Deps, logId: string, signal: AbortSignal): Promise<void> {
  const log = await store.rowById(deps.db, logId)
  if (!log || log.state === 'ready') return
  const { attempt } = log
  const say = (patch: Partial<store.LogRow>) => store.updateAttempt(deps.db, logId, attempt, patch)
  await say({ state: 'reading', progress: 0.05 })
  const reading = await readOriginal(deps, logId, signal)
  if (!reading.ok) {
    await sayTrouble(deps, log, { state: 'rejected', progress: 1, trouble: reading.detail })
    return
  }
  await say({ progress: 0.6, rows: reading.rows })
  const sheet = await currentSheet(deps.db, log.vehicleId)
  const stoichAfr = sheet?.stoichAfr ?? 14.7
  const mapping = await mappingOf(deps, log, reading, stoichAfr)
  const channels = toChannels(mapping, reading.columns, stoichAfr)
  const time = channels.get('time')
  const durationS = time?.at(-1) ?? 0
  const rateHz = durationS > 0 ? (reading.rows - 1) / durationS : 0
  const health = channelHealth(channels, {
    boosted: sheet?.boosted ?? false,
    lambdaLow: sheet?.lambdaLow ?? 0.65,
    lambdaHigh: sheet?.lambdaHigh ?? 1.35,
    rateHz,
  })
  const lacking = missingChannels(mapping)
  const faults = reading.faults.map(({ kind, count, examples }) => ({ kind, count, examples: [...examples] }))
  await storeReading(deps, log, channels, {
    state: lacking.length === 0 ? 'ready' : 'needs-mapping',
    trouble: lacking.length === 0 ? null : `No column was recognised as ${lacking.join(', ')}: say which it is.`,
    progress: 1,
    mapping,
    health,
    faults,
    durationS,
    rateHz,
    readAt: deps.clock.now(),
  })
}

/** Stores why a log could not be read and tells who uploaded it; once, however often the job is tried again. */
async function sayTrouble(
  deps: Deps,
  log: store.LogRow,
  patch: Partial<store.LogRow> & { readonly trouble: string },
): Promise<void> {
  await deps.db.transaction(async (tx) => {
    const written = await store.updateAttempt(tx, log.id, log.attempt, patch)
    if (!written || log.trouble !== null) return
    const vehicle = await vehicleById(tx, log.vehicleId)
    await tell(deps, tx, [log.uploadedById], {
      kind: 'log-failed',
      workshopId: vehicle.workshopId,
      vehicleId: vehicle.id,
      title: `Log ${log.number} of ${vehicle.name} could not be read`,
      words: [`“${log.title}”: ${patch.trouble}`],
      linkWords: `Open Log ${log.number}`,
      path: `/vehicles/${vehicle.id}/logs/${log.id}`,
    })
  })
}

/** State and blocks together or not at all, on one connection because COPY needs it; a stale attempt writes nothing. */
async function storeReading(
  deps: Deps,
  log: store.LogRow,
  channels: Parameters<typeof writeChannels>[2],
  patch: Partial<store.LogRow>,
): Promise<void> {
  const client = await deps.pool.connect()
  const db = openDb(client)
  try {
    await client.query('begin')
    if (await store.updateAttempt(db, log.id, log.attempt, patch)) {
      await db.delete(logBlocks).where(eq(logBlocks.logId, log.id))
      await writeChannels(client, log.id, channels)
    }
    await client.query('commit')
  } catch (error) {
    await client.query('rollback')
    throw error
  } finally {
    client.release()
  }
}

export const logJobs: readonly JobDefinition[] = [
  {
    name: 'log.read',
    async handle(deps, payload, signal) {
      const { logId } = Payload.parse(payload)
      try {
        await readLog(deps, logId, signal)
      } catch (error) {
        if (!signal.aborted) {
          deps.log.error({ err: error, logId }, 'a log could not be read')
          const log = await store.rowById(deps.db, logId)
          if (log) {
            await sayTrouble(deps, log, {
              state: 'failed',
              trouble: 'Reading stopped with a fault on our side. The file is kept; try again.',
            })
          }
        }
        throw error
      }
    },
  },
]
