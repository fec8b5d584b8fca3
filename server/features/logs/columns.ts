/** Channels as they lie in the database: blocks of 65,536 samples, one row each, beside a coarse min/max level. */
import type pg from 'pg'
import { ChannelName } from '../../../shared/contract/logs.ts'
import { Id } from '../../../shared/wire.ts'
import { decodeBlock, encodeBlock } from '../../platform/columns/block-codec.ts'
import { copyIn, copyOut, textBytes, uuidBytes, type CopyField } from '../../platform/columns/copy.ts'

const blockSamples = 65_536
const levelSamples = 64

export type ChannelValues = Float32Array | Float64Array

/** Lowest and highest of every 64 samples, as pairs; NaN where a stretch holds no reading. */
export function minMaxLevel(values: ChannelValues): Float32Array {
  const stretches = Math.ceil(values.length / levelSamples)
  const level = new Float32Array(2 * stretches)
  for (let s = 0; s < stretches; s += 1) {
    let low = Infinity
    let high = -Infinity
    for (let i = s * levelSamples; i < Math.min(values.length, (s + 1) * levelSamples); i += 1) {
      const value = values[i]!
      if (value < low) low = value
      if (value > high) high = value
    }
    level[2 * s] = high < low ? Number.NaN : low
    level[2 * s + 1] = high < low ? Number.NaN : high
  }
  return level
}

function* blocksOf(logId: string, channels: ReadonlyMap<ChannelName, ChannelValues>): Generator<CopyField[]> {
  for (const [channel, values] of channels) {
    for (let start = 0, block = 0; start < values.length; start += blockSamples, block += 1) {
      const part = values.subarray(start, start + blockSamples)
      const level = minMaxLevel(part)
      yield [uuidBytes(logId), textBytes(channel), block, part.length, encodeBlock(part), new Uint8Array(level.buffer)]
    }
  }
}

/** @param client  in the transaction that also writes the log's state. */
export const writeChannels = (
  client: pg.PoolClient,
  logId: string,
  channels: ReadonlyMap<ChannelName, ChannelValues>,
): Promise<void> =>
  copyIn(client, 'log_blocks (log_id, channel, block, samples, data, level)', blocksOf(logId, channels))

/** Reads channels whole; those the log lacks are absent from the answer. */
export async function readChannels(
  pool: pg.Pool,
  logId: string,
  names: readonly ChannelName[],
): Promise<Map<ChannelName, Float64Array>> {
  // COPY takes no parameters, so both are parsed before they stand in the query.
  const id = Id.parse(logId)
  const list = names.map((name) => `'${ChannelName.parse(name)}'`).join(', ')
  const client = await pool.connect()
  try {
    const rows = await copyOut(
      client,
      `select channel, data from log_blocks where log_id = '${id}' and channel in (${list}) order by channel, block`,
    )
    const parts = new Map<ChannelName, ChannelValues[]>()
    for (const [name, data] of rows) {
      const channel = ChannelName.parse(name!.toString('utf8'))
      parts.set(channel, [...(parts.get(channel) ?? []), decodeBlock(data!)])
    }
    return new Map([...parts].map(([channel, blocks]) => [channel, joined(blocks)]))
  } finally {
    client.release()
  }
}

function joined(blocks: readonly ChannelValues[]): Float64Array {
  const whole = new Float64Array(blocks.reduce((sum, block) => sum + block.length, 0))
  let at = 0
  for (const block of blocks) {
    whole.set(block, at)
    at += block.length
  }
  return whole
}
