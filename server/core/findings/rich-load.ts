/** Much richer than asked for under high load. */
import { underLoad } from './under-load.ts'
import { finding, reach, runsWhere, type Detector } from './view.ts'

export const richLoad: Detector = (view) => {
  const load = underLoad(view)
  const accel = view.columns.get('accel')
  const runs = runsWhere(view, (i) => load[i] === 1 && view.ratio[i]! < 0.88 && !((accel?.[i] ?? 0) > 2), 1, 0.2)
  return finding(
    view,
    runs,
    {
      kind: 'rich-load',
      urgency: 'look',
      title: 'Over-rich under load',
      usually:
        'VE too high in these cells, or two enrichments at once. It costs power and washes oil off the bores, but take fuel away in small steps only.',
    },
    [
      ['richest, of what was asked', 100 * Math.min(...runs.map((run) => reach(view.ratio, run).low)), '%'],
      ['highest pressure', Math.max(...runs.map((run) => reach(view.map, run).high)), 'kPa'],
    ],
  )
}
