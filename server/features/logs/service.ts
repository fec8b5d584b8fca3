/** Use cases of drive logs: receive, list, change, map, plot, hand out. */
import { createHash } from 'node:crypto'
import { Readable } from 'node:stream'
import { createGunzip } from 'node:zlib'
import { and, eq, sql } from 'drizzle-orm'
import type { ChannelName, Log, LogLine, Trace } from '../../../shared/contract/logs.ts'
import { channelNames, ChannelName as ChannelSchema } from '../../../shared/contract/logs.ts'
import { missingChannels } from '../../core/channels/recognise.ts'
import { storedUnit } from '../../core/channels/convert.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import { isUniqueViolation, type Reader, type Tx } from '../../platform/db/client.ts'
import { logs } from '../../platform/db/schema/logs.ts'
import { scopeOf, type Actor, type Scope } from '../../platform/http/actor.ts'
import type { FileAnswer, UploadedFile } from '../../platform/http/on.ts'
import { Problem } from '../../platform/http/problem.ts'
import { enqueue } from '../../platform/queue/enqueue.ts'
import { revisionInScope } from '../tables/service.ts'
import { currentSheet, lockVehicle, vehicleInScope } from '../vehicles/service.ts'
import { readChannels } from './columns.ts'
import { traceOf } from './trace.ts'
import { keepOriginal, originalPieces, sha256Of } from './originals.ts'
import * as store from './store.ts'

export { factsOf, loadDrive, readingOf } from './drives.ts'

const order = { dead: 0, caution: 1, sound: 2, absent: 3 } as const

function toLine({ row, uploader, flashedNumber }: store.LogFound): LogLine {
  const worst = row.health.reduce<LogLine['worstHealth']>(
    (found, { state }) => (found === null || order[state] < order[found] ? state : found),
    null,
  )
  return {
    id: row.id,
    vehicleId: row.vehicleId,
    number: row.number,
    title: row.title,
    fileName: row.fileName,
    bytes: row.bytes,
    sha256: row.sha256,
    state: row.state,
    progress: row.progress,
    trouble: row.trouble,
    rows: row.rows,
    durationS: row.durationS,
    rateHz: row.rateHz,
    recordedOn: row.recordedOn,
    uploadedAt: row.createdAt.toISOString(),
    uploadedBy: uploader,
    flashedRevision:
      row.flashedRevisionId && flashedNumber !== null ? { id: row.flashedRevisionId, number: flashedNumber } : null,
    worstHealth: worst,
  }
}

async function toLog(db: Reader, found: store.LogFound): Promise<Log> {
  const { row } = found
  const present = new Set((await store.channelsOf(db, row.id)).map(({ channel }) => channel))
  return {
    ...toLine(found),
    mapping: row.mapping,
    health: row.health,
    faults: row.faults,
    channels: channelNames.filter((name) => present.has(name)),
    note: row.note,
    version: row.version,
  }
}

async function logInScope(db: Reader, scope: Scope, logId: string): Promise<store.LogFound> {
  const found = await store.logById(db, scope, logId)
  if (!found) throw new Problem('not-found')
  return found
}

export interface UploadFacts {
  readonly title: string
  readonly recordedOn?: string | undefined
  readonly flashedRevisionId?: string | undefined
}

export async function receiveLog(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  file: UploadedFile | null,
  facts: UploadFacts,
): Promise<LogLine> {
  const scope = scopeOf(actor)
  if (!file) throw new Problem('no-file', { detail: 'Send the log as the multipart field “file”.' })
  const vehicle = await vehicleInScope(deps.db, scope, vehicleId)
  if ((await store.bytesHeld(deps.db, actor.workshopId)) + file.bytes > deps.config.quotaBytes)
    throw new Problem('quota-full')
  const flashedRevisionId = facts.flashedRevisionId ?? vehicle.flashedRevisionId
  const sha256 = await sha256Of(file.path)
  const twin = await store.logBySha(deps.db, vehicleId, sha256)
  if (twin) throw alreadyHere(twin)
  const fileName = file.name.replace(/[/\\\p{Cc}]/gu, '').slice(0, 120) || 'log.csv'
  try {
    return await deps.db.transaction(async (tx) => {
      if (facts.flashedRevisionId) await ofVehicle(tx, scope, vehicleId, facts.flashedRevisionId)
      await lockVehicle(tx, vehicleId)
      const sheet = await currentSheet(tx, vehicleId)
      const [row] = await tx
        .insert(logs)
        .values({
          vehicleId,
          number: (await store.lastNumber(tx, vehicleId)) + 1,
          title: facts.title || fileName.replace(/\.\w+$/, ''),
          fileName,
          bytes: file.bytes,
          sha256,
          recordedOn: facts.recordedOn ?? null,
          uploadedById: actor.personId,
          flashedRevisionId,
          engineSheetId: sheet?.id ?? null,
        })
        .returning()
      await keepOriginal(tx, row!.id, file.path)
      await enqueue(tx, 'log.read', { logId: row!.id }, `log.read:${row!.id}`)
      await recordAudit(tx, actor, {
        action: 'log.upload',
        subject: `Log ${row!.number}`,
        vehicleId,
        facts: { logId: row!.id, sha256, fileName },
      })
      return toLine(await logInScope(tx, scope, row!.id))
    })
  } catch (error) {
    if (isUniqueViolation(error, 'logs_vehicleId_sha256_unique')) throw new Problem('log-duplicate')
    throw error
  }
}

const alreadyHere = (twin: store.LogRow) =>
  new Problem('log-duplicate', {
    detail: `It is Log ${twin.number}, uploaded on ${twin.createdAt.toISOString().slice(0, 10)}.`,
  })

async function ofVehicle(db: Reader, scope: Scope, vehicleId: string, revisionId: string): Promise<void> {
  const { row } = await revisionInScope(db, scope, revisionId)
  if (row.vehicleId !== vehicleId || row.kind !== 've') throw new Problem('not-found')
}

export async function listLogs(deps: Deps, actor: Actor, vehicleId: string): Promise<LogLine[]> {
  await vehicleInScope(deps.db, scopeOf(actor), vehicleId)
  return (await store.logsOf(deps.db, scopeOf(actor), vehicleId)).map(toLine)
}

export async function getLog(deps: Deps, actor: Actor, logId: string): Promise<Log> {
  return toLog(deps.db, await logInScope(deps.db, scopeOf(actor), logId))
}

export interface LogChange {
  readonly version: number
  readonly title?: string | undefined
  readonly note?: string | undefined
  readonly recordedOn?: string | null | undefined
  readonly flashedRevisionId?: string | null | undefined
}

export async function changeLog(deps: Deps, actor: Actor, logId: string, change: LogChange): Promise<Log> {
  const scope = scopeOf(actor)
  const { version, ...fields } = change
  return deps.db.transaction(async (tx) => {
    const { row } = await logInScope(tx, scope, logId)
    if (fields.flashedRevisionId) await ofVehicle(tx, scope, row.vehicleId, fields.flashedRevisionId)
    const changed = await tx
      .update(logs)
      .set({ ...fields, version: sql`${logs.version} + 1` })
      .where(and(eq(logs.id, logId), eq(logs.version, version)))
      .returning({ id: logs.id })
    if (changed.length === 0)
      throw new Problem('changed-meanwhile', {
        detail: 'Load the page again to see the other change, then make yours.',
      })
    await recordAudit(tx, actor, {
      action: 'log.change',
      subject: `Log ${row.number}`,
      vehicleId: row.vehicleId,
      facts: fields,
    })
    return toLog(tx, await logInScope(tx, scope, logId))
  })
}

/** Starts a new reading; the attempt's number fences off any reading still under way. */
async function readAnew(tx: Tx, logId: string): Promise<void> {
  await tx
    .update(logs)
    .set({
      state: 'received',
      progress: 0,
      trouble: null,
      attempt: sql`${logs.attempt} + 1`,
      version: sql`${logs.version} + 1`,
    })
    .where(eq(logs.id, logId))
  await enqueue(tx, 'log.read', { logId }, `log.read:${logId}`)
}

export const headerHashOf = (header: readonly string[]): string =>
  createHash('sha256').update(JSON.stringify(header)).digest('hex')

export async function mapColumns(
  deps: Deps,
  actor: Actor,
  logId: string,
  columns: { index: number; channel: ChannelName | null; unit: string }[],
): Promise<Log> {
  const scope = scopeOf(actor)
  return deps.db.transaction(async (tx) => {
    const { row } = await logInScope(tx, scope, logId)
    const mapping = row.mapping.map((column) => {
      const said = columns.find((each) => each.index === column.index)
      return said
        ? { ...column, channel: said.channel, unit: said.unit, confidence: 1, reason: `Said by ${actor.name}` }
        : column
    })
    const channels = mapping.flatMap(({ channel }) => channel ?? [])
    const twice = channels.find((channel, i) => channels.indexOf(channel) !== i)
    if (twice) throw new Problem('mapping-incomplete', { detail: `Two columns are ${twice}: leave one unused.` })
    const lacking = missingChannels(mapping)
    if (lacking.length > 0) throw new Problem('mapping-incomplete', { detail: `No column is ${lacking.join(', ')}.` })
    await tx.update(logs).set({ mapping, mappingSetBy: actor.personId }).where(eq(logs.id, logId))
    await store.rememberMapping(
      tx,
      row.vehicleId,
      headerHashOf(mapping.map(({ header }) => header)),
      mapping.map(({ index, channel, unit }) => ({ index, channel, unit })),
    )
    await readAnew(tx, logId)
    await recordAudit(tx, actor, {
      action: 'log.map',
      subject: `Log ${row.number}`,
      vehicleId: row.vehicleId,
      facts: { columns },
    })
    return toLog(tx, await logInScope(tx, scope, logId))
  })
}

export async function readLogAgain(deps: Deps, actor: Actor, logId: string): Promise<Log> {
  return deps.db.transaction(async (tx) => {
    const { row } = await logInScope(tx, scopeOf(actor), logId)
    await readAnew(tx, logId)
    await recordAudit(tx, actor, { action: 'log.read-again', subject: `Log ${row.number}`, vehicleId: row.vehicleId })
    return toLog(tx, await logInScope(tx, scopeOf(actor), logId))
  })
}

export interface TraceQuery {
  readonly channels: string
  readonly fromS?: number | undefined
  readonly toS?: number | undefined
  readonly points: number
}

export async function getTraces(deps: Deps, actor: Actor, logId: string, query: TraceQuery): Promise<Trace[]> {
  await logInScope(deps.db, scopeOf(actor), logId)
  const names = query.channels.split(',').flatMap((name) => {
    const parsed = ChannelSchema.safeParse(name.trim())
    return parsed.success ? [parsed.data] : []
  })
  const channels = await readChannels(deps.pool, logId, ['time', ...names])
  const time = channels.get('time')
  if (!time) return []
  return names.flatMap((name) => {
    const values = channels.get(name)
    return values
      ? [{ channel: name, unit: storedUnit[name], ...traceOf(time, values, query.points, query.fromS, query.toS) }]
      : []
  })
}

export async function downloadLog(deps: Deps, actor: Actor, logId: string): Promise<FileAnswer> {
  const { row } = await logInScope(deps.db, scopeOf(actor), logId)
  const body = Readable.from(originalPieces(deps.db, logId)).pipe(createGunzip())
  return { file: { name: row.fileName, type: 'text/csv; charset=utf-8', body } }
}

export async function removeLog(deps: Deps, actor: Actor, logId: string): Promise<void> {
  await deps.db.transaction(async (tx) => {
    const { row } = await logInScope(tx, scopeOf(actor), logId)
    if (await store.isUsed(tx, logId))
      throw new Problem('log-in-use', { detail: 'A proposal was learned from it, so it stays as evidence.' })
    await tx.delete(logs).where(eq(logs.id, logId))
    await recordAudit(tx, actor, {
      action: 'log.remove',
      subject: `Log ${row.number}`,
      vehicleId: row.vehicleId,
      facts: { sha256: row.sha256, fileName: row.fileName },
    })
  })
}

/** Logs of the vehicle by id, in the order of their numbers. @throws Problem not-found when one is not the vehicle's. */
export async function logsInScope(
  db: Reader,
  scope: Scope,
  vehicleId: string,
  logIds: readonly string[],
): Promise<LogLine[]> {
  const all = (await store.logsOf(db, scope, vehicleId)).map(toLine)
  const chosen = all.filter((log) => logIds.includes(log.id))
  if (chosen.length !== new Set(logIds).size) throw new Problem('not-found')
  return chosen.sort((a, b) => a.number - b.number)
}
