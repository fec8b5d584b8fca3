/** Leaner than asked for under high load: the one finding that says to stop. */
import { underLoad } from './under-load.ts'
import { finding, reach, runsWhere, type Detector } from './view.ts'

export const leanLoad: Detector = (view) => {
  const load = underLoad(view)
  const { lambda } = view
  const runs = lambda
    ? runsWhere(view, (i) => load[i] === 1 && view.ratio[i]! > 1.07 && lambda[i]! > 0.9, 0.4, 0.2)
    : []
  return finding(
    view,
    runs,
    {
      kind: 'lean-load',
      urgency: 'stop',
      title: 'Lean under high load: stop driving it hard until this is settled',
      usually:
        'Too little VE in these cells, or fuel pressure that falls away. Lean under load burns pistons: settle it before the next pull.',
    },
    [
      ['leanest lambda', lambda ? Math.max(...runs.map((run) => reach(lambda, run).high)) : Number.NaN, ''],
      ['leanest, of what was asked', 100 * Math.max(...runs.map((run) => reach(view.ratio, run).high)), '%'],
      ['highest pressure', Math.max(...runs.map((run) => reach(view.map, run).high)), 'kPa'],
    ],
  )
}
