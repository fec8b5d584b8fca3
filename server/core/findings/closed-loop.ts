/** The closed loop has reached the end of what it may correct. */
import { finding, reach, runsWhere, type Detector } from './view.ts'

export const closedLoop: Detector = (view) => {
  const trim = view.columns.get('trim')
  if (!trim) return null
  const ends = reach(trim, { from: 0, to: view.n - 1 })
  // A loop stands exactly on its limit; one that only passes its largest value does not stay there.
  const runs = [ends.high, ends.low].flatMap((end) =>
    Math.abs(end) < 6 ? [] : runsWhere(view, (i) => Math.abs(trim[i]! - end) < 0.06, 3),
  )
  const least = runs.map((run) => reach(trim, run)).sort((a, b) => Math.abs(b.high) - Math.abs(a.high))[0]
  return finding(
    view,
    runs.sort((a, b) => a.from - b.from),
    {
      kind: 'closed-loop',
      urgency: 'look',
      title: 'The closed loop stands at its limit',
      usually:
        'The cells are further off than the loop may correct, or something else is: a leak, fuel pressure, a sensor.',
    },
    [['trim', least?.high ?? 0, '%']],
  )
}
