/** Channels as they lie in the database: blocks of 65,536 samples, one row each, beside a coarse min/max level. */
import type { ChannelName } from '../../../shared/contract/logs.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { logBlocks } from '../../platform/db/schema/logs.ts'
import * as store from './store.ts'

const blockSamples = 65_536
const levelSamples = 64

export type ChannelValues = Float32Array | Float64Array

const bytesOf = (values: ChannelValues): Uint8Array =>
  new Uint8Array(values.buffer, values.byteOffset, values.byteLength)

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

export async function writeChannels(
  tx: Tx,
  logId: string,
  channels: ReadonlyMap<ChannelName, ChannelValues>,
): Promise<void> {
  for (const [channel, values] of channels) {
    for (let start = 0, block = 0; start < values.length; start += blockSamples, block += 1) {
      const part = values.subarray(start, start + blockSamples)
      await tx.insert(logBlocks).values({
        logId,
        channel,
        block,
        samples: part.length,
        data: bytesOf(part),
        level: bytesOf(minMaxLevel(part)),
      })
    }
  }
}

/** Reads channels whole; those the log lacks are absent from the answer. Time is double precision, the rest single. */
export async function readChannels(
  db: Reader,
  logId: string,
  names: readonly ChannelName[],
): Promise<Map<ChannelName, Float64Array>> {
  const parts = new Map<string, ChannelValues[]>()
  for (const { channel, data } of await store.blocksOf(db, logId, names)) {
    const buffer = data.slice().buffer
    const values = channel === 'time' ? new Float64Array(buffer) : new Float32Array(buffer)
    parts.set(channel, [...(parts.get(channel) ?? []), values])
  }
  return new Map(
    [...parts].map(([channel, list]) => {
      const whole = new Float64Array(list.reduce((sum, part) => sum + part.length, 0))
      let at = 0
      for (const part of list) {
        whole.set(part, at)
        at += part.length
      }
      return [channel as ChannelName, whole]
    }),
  )
}
