/** Readings that vanish or jump and come back: a contact, not the engine. */
import type { ChannelName } from '../../../shared/contract/logs.ts'
import { finding, runsWhere, type Detector, type DriveView, type Rows } from './view.ts'

const names: Partial<Record<ChannelName, string>> = {
  rpm: 'engine speed',
  map: 'manifold pressure',
  lambda: 'lambda',
  tp: 'throttle',
  ect: 'coolant temperature',
  iat: 'intake air temperature',
  battery: 'battery',
}
/** A change between two rows that no engine makes; temperatures in °C, voltage in V. */
const jump: Partial<Record<ChannelName, number>> = { ect: 15, iat: 15, battery: 4 }

/** Blank or impossible rows of one channel, both sides of which are sound; a channel that is dead is not dropping out. */
function dropsOf(view: DriveView, channel: ChannelName, values: Float64Array): Rows[] {
  const { lambdaLow, lambdaHigh } = view.facts
  const least = jump[channel]
  let sound = Number.NaN
  const bad = Uint8Array.from(values, (value, i) => {
    const isOut =
      !Number.isFinite(value) ||
      (channel === 'lambda' && (value < lambdaLow - 0.06 || value > lambdaHigh + 0.06)) ||
      (channel === 'rpm' && value === 0 && i > 0 && values[i - 1]! > 500)
    const leaps = least !== undefined && Math.abs(value - sound) > least
    if (!isOut && !leaps) sound = value
    return Number(isOut || leaps)
  })
  return runsWhere(view, (i) => bad[i] === 1, 0).filter(
    ({ from, to }) => from > 0 && to < view.n - 1 && view.timeS[to]! - view.timeS[from]! < 20,
  )
}

export const dropouts: Detector = (view) => {
  const found = [...view.columns].flatMap(([channel, values]) =>
    names[channel] ? [{ channel, runs: dropsOf(view, channel, values) }] : [],
  )
  const guilty = found.filter(({ runs }) => runs.length > 0)
  return finding(
    view,
    guilty.flatMap(({ runs }) => runs).sort((a, b) => a.from - b.from),
    {
      kind: 'dropouts',
      urgency: 'look',
      title: `Readings drop out: ${guilty.map(({ channel }) => names[channel]).join(', ')}`,
      usually:
        'A plug, a pin or a wire that loses contact as the vehicle shakes. Move the loom by hand while watching.',
    },
    guilty.map(({ channel, runs }) => [names[channel]!, runs.length, 'times']),
  )
}
