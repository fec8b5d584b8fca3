/** Air that was not burnt reads as lean, and the engine shakes: like a misfire. */
import { finding, median, reach, runsWhere, type Detector, type DriveView } from './view.ts'

/** Unsteadiness of engine speed around each row, 1/min: mean size of the second difference over half a second each way. */
function unsteadiness(view: DriveView): Float64Array {
  const half = Math.max(2, Math.round(0.5 / view.dtS))
  const bends = view.rpm.map((speed, i) =>
    i > 0 && i < view.n - 1 ? Math.abs(view.rpm[i - 1]! - 2 * speed + view.rpm[i + 1]!) : 0,
  )
  return bends.map((_, i) => {
    const near = bends.subarray(Math.max(0, i - half), i + half + 1)
    return near.reduce((sum, value) => sum + value, 0) / near.length
  })
}

export const misfire: Detector = (view) => {
  // A slower logger cannot tell a shaking engine from one that changes speed.
  if (view.dtS > 0.21) return null
  const shaking = unsteadiness(view)
  const usual = Math.max(3, median(shaking))
  const runs = runsWhere(
    view,
    (i) => view.rpm[i]! > 500 && view.ratio[i]! > 1.1 && shaking[i]! > 3 * usual && view.sinceCutS[i]! > 1.5,
    0.5,
    0.3,
  )
  return finding(
    view,
    runs,
    {
      kind: 'misfire',
      urgency: 'look',
      title: 'Lean readings with unsteady engine speed, like a misfire',
      usually:
        'A cylinder that does not burn sends its air to the sensor, which reads it as lean. More fuel will not mend it: look at plugs, leads and coils first.',
    },
    [
      ['leanest, of what was asked', 100 * Math.max(...runs.map((run) => reach(view.ratio, run).high)), '%'],
      ['unsteadiness, of the usual', Math.max(...runs.map((run) => reach(shaking, run).high)) / usual, 'times'],
    ],
  )
}
