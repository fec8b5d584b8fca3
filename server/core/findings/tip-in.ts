/** Lean as the throttle opens and rich a moment later: the film on the port walls, not the table. */
import { finding, reach, rowAfter, type Detector, type DriveView, type Rows } from './view.ts'

const lean = 1.15
const rich = 0.87

/** Rows where the throttle goes down fast; one for each press. Without a throttle, manifold pressure tells. */
function presses(view: DriveView): number[] {
  const tp = view.columns.get('tp')
  const pedal = tp ?? view.map
  const least = tp ? 10 : 18
  const found: number[] = []
  for (let i = 0; i < view.n; i += 1) {
    const last = found.at(-1)
    if (last !== undefined && view.timeS[i]! - view.timeS[last]! < 2) continue
    if (view.sinceCutS[i]! < 1.5) continue
    if (pedal[rowAfter(view, i, 0.4)]! - pedal[i]! > least) found.push(i)
  }
  return found
}

/** What stays lean was asked too little of its cells; a spike is over within a second. */
function isBrief(view: DriveView, { from, to }: Rows): boolean {
  let leanS = 0
  for (let i = from; i <= to; i += 1) if (view.ratio[i]! > 1.07) leanS += view.dtS
  return leanS < 1
}

export const tipIn: Detector = (view) => {
  const spikes: Rows[] = []
  let worst = 1
  let richest = 1
  let bogs = 0
  for (const from of presses(view)) {
    const after = reach(view.ratio, { from, to: rowAfter(view, from, 1.2) })
    const run = { from, to: rowAfter(view, from, 4) }
    if (!(after.high > lean) || !isBrief(view, run)) continue
    const later = reach(view.ratio, { from: rowAfter(view, from, 0.5), to: run.to })
    if (later.low < rich) bogs += 1
    worst = Math.max(worst, after.high)
    richest = Math.min(richest, later.low)
    spikes.push(run)
  }
  return finding(
    view,
    spikes,
    {
      kind: 'tip-in',
      urgency: 'look',
      title: bogs > 0 ? 'A lean spike at tip-in, a rich bog after it' : 'A lean spike at tip-in',
      usually:
        'Transient fuel, not VE: the film on the port walls takes fuel as the throttle opens. Set the acceleration enrichment, and leave the cells alone.',
    },
    [
      ['leanest, of what was asked', 100 * worst, '%'],
      ['richest after it', 100 * richest, '%'],
      ['with a rich bog', bogs, 'times'],
    ],
  )
}
