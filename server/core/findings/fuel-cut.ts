/** Fuel on overrun: a cut that never comes, or one that does not end when it should. */
import { finding, runsWhere, type Detector } from './view.ts'

export const cutMissing: Detector = (view) => {
  const overruns = runsWhere(
    view,
    (i) => view.closed[i] === 1 && view.rpm[i]! > view.idleRpm + 600 && view.map[i]! < 0.36 * view.baroKpa,
    1.5,
  )
  const knows = view.columns.has('pulseWidth') || view.lambda !== undefined
  // One overrun may be too short or the engine too cold; a cut seen once is there.
  const isMissing = knows && overruns.length >= 2 && !view.cut.includes(1)
  return finding(
    view,
    isMissing ? overruns : [],
    {
      kind: 'cut-missing',
      urgency: 'note',
      title: 'The fuel is never cut on overrun',
      usually: 'The cut is switched off or its limits are never met. It wastes fuel and can make the exhaust bang.',
    },
    [['overruns', overruns.length, '']],
  )
}

export const cutStays: Detector = (view) => {
  const tp = view.columns.get('tp')
  if (!view.columns.has('pulseWidth')) return null
  const runs = runsWhere(
    view,
    (i) =>
      view.cut[i] === 1 &&
      ((tp !== undefined && view.closed[i] === 0 && tp[i]! > 5) || view.rpm[i]! < 1.1 * view.idleRpm),
    0.4,
  )
  return finding(
    view,
    runs,
    {
      kind: 'cut-stays',
      urgency: 'look',
      title: 'The fuel cut ends too late',
      usually: 'The speed at which fuel comes back is set too near to idle, or the throttle’s resting place is wrong.',
    },
    [['longest', Math.max(...runs.map(({ from, to }) => view.timeS[to]! - view.timeS[from]!)), 's']],
  )
}
