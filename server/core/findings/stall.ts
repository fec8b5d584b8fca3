/** The engine dies or nearly dies with the throttle closed. */
import { finding, reach, rowAfter, runsWhere, type Detector } from './view.ts'

/** Below this share of idle speed an engine is about to stop: common practice. */
const nearlyOut = 0.65

export const stall: Detector = (view) => {
  const runs = runsWhere(view, (i) => view.closed[i] === 1 && view.rpm[i]! < nearlyOut * view.idleRpm, 0.15, 1).filter(
    ({ from }) => reach(view.rpm, { from: rowAfter(view, from, -4), to: from }).high > 0.9 * view.idleRpm,
  )
  const lowest = Math.min(...runs.map((run) => reach(view.rpm, run).low))
  const returning = runs.filter(
    ({ from }) => reach(view.rpm, { from: rowAfter(view, from, -5), to: from }).high > 1.45 * view.idleRpm,
  ).length
  const where = returning > 0 ? 'on the return to idle' : 'at idle'
  return finding(
    view,
    runs,
    {
      kind: 'stall',
      urgency: 'look',
      title: `The engine ${lowest < 150 ? 'stalls' : 'nearly stalls'} ${where}`,
      usually:
        'Idle cells far from the mixture the engine needs, fuel that comes back late after a cut, or an air valve that follows too slowly.',
    },
    [
      ['lowest speed', lowest, '1/min'],
      ['idle speed', view.idleRpm, '1/min'],
      ['on the return to idle', returning, 'times'],
    ],
  )
}
