const isDead = (row: store.LogRow, channel: ChannelName): boolean =>
  row.health.some((each) => each.channel === channel && each.state === 'dead')

/** A log as the learner takes it: columns, the engine's facts, and what they depend on. */
import { channelNames, type ChannelName } from '../../../shared/contract/logs.ts'
import type { EngineSheetInput } from '../../../shared/contract/vehicles.ts'
import type { Drive, EngineFacts } from '../../core/drive.ts'
import type { Deps } from '../../deps.ts'
import type { Reader } from '../../platform/db/client.ts'
import { Problem } from '../../platform/http/problem.ts'
import { tableById, type Table } from '../tables/service.ts'
import { readChannels } from './columns.ts'
import * as store from './store.ts'

/** The engine's facts as the learner takes them; the injector's flow becomes mass of this fuel. */
export const factsOf = (sheet: EngineSheetInput): EngineFacts => ({
  displacementL: sheet.displacementL,
  cylinders: sheet.cylinders,
  boosted: sheet.boosted,
  lambdaRange: { low: sheet.lambdaLow, high: sheet.lambdaHigh },
  revLimitRpm: sheet.revLimitRpm,
  stoichAfr: sheet.stoichAfr,
  injector: {
    mgPerMs: (sheet.injectorFlowCcMin * sheet.fuelDensityGPerCc) / 60,
    deadTimeMs: sheet.deadTimeMs,
  },
})

/** What a log's columns and its flashed table were when it was read: changes with every reading and every answer. */
export async function readingOf(db: Reader, logId: string): Promise<unknown> {
  const row = await store.rowById(db, logId)
  const flashed = row?.flashedRevisionId ? await tableById(db, row.flashedRevisionId) : null
  return [row?.sha256, row?.attempt, row?.mapping, row?.number, flashed?.checksum]
}

const multiplier = (percent: Float64Array | undefined): Float64Array | undefined =>
  percent?.map((value) => 1 + value / 100)

/** A log as the learner takes it: columns from the database, the table that was in the engine, the target in force. */
export async function loadDrive({ db, pool }: Pick<Deps, 'db' | 'pool'>, logId: string, target: Table): Promise<Drive> {
  const row = await store.rowById(db, logId)
  const flashed = row?.flashedRevisionId ? await tableById(db, row.flashedRevisionId) : null
  if (!row || !flashed)
    throw new Problem('log-not-ready', { detail: 'Say which revision was in the engine when the log was recorded.' })
  const c = await readChannels(pool, logId, channelNames)
  const need = (name: ChannelName): Float64Array => {
    const values = c.get(name)
    if (!values) throw new Problem('log-not-ready', { detail: `Log ${row.number} has no ${name}.` })
    return values
  }
  const optional = {
    // A dead sensor's −40 °C would make a quarter more air of every filling; an ordinary guess is nearer.
    iatC: isDead(row, 'iat') ? undefined : c.get('iat'),
    ectC: c.get('ect'),
    tpPct: c.get('tp'),
    trim: multiplier(c.get('trim')),
    warmup: multiplier(c.get('warmup')),
    afterStart: multiplier(c.get('afterStart')),
    accel: multiplier(c.get('accel')),
    pulseWidthMs: c.get('pulseWidth'),
    batteryV: c.get('battery'),
    targetLambda: c.get('targetLambda'),
  }
  const present = Object.fromEntries(Object.entries(optional).filter(([, values]) => values !== undefined))
  return {
    id: row.id,
    number: row.number,
    timeS: need('time'),
    rpm: need('rpm'),
    mapKpa: need('map'),
    lambda: need('lambda'),
    ...present,
    flashed: { grid: flashed.grid, ve: flashed.values },
    target: { grid: target.grid, lambda: target.values },
  }
}
