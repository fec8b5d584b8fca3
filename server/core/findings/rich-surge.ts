/** The mixture turns rich all at once, with nobody touching the throttle and no enrichment at work. */
import { finding, pressedWithin, reach, rowAfter, runsWhere, type Detector } from './view.ts'

export const richSurge: Detector = (view) => {
  const accel = view.columns.get('accel')
  const runs = runsWhere(view, (i) => view.ratio[i]! < 0.82 && view.sinceCutS[i]! > 2, 0.4, 0.2).filter((run) => {
    const before = reach(view.ratio, { from: rowAfter(view, run.from, -0.8), to: run.from })
    return (
      view.timeS[run.to]! - view.timeS[run.from]! < 8 &&
      before.high > 0.92 &&
      view.map[run.from]! < 0.85 * view.baroKpa &&
      !((accel?.[run.from] ?? 0) > 2) &&
      !pressedWithin(view, run.from, 3)
    )
  })
  return finding(
    view,
    runs,
    {
      kind: 'rich-surge',
      urgency: 'look',
      title: 'The mixture surges rich on a steady throttle',
      usually: 'Fuel from somewhere else: a purge valve opening, an oil breather, a leaking regulator or injector.',
    },
    [['richest, of what was asked', 100 * Math.min(...runs.map((run) => reach(view.ratio, run).low)), '%']],
  )
}
