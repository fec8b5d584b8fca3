/** Coolant that takes too long to get warm, or cools down again on the road. */
import { finding, reach, runsWhere, type Detector, type Rows } from './view.ts'

/** A sound thermostat lets a running engine reach this within this time: common practice. */
const warmC = 70
const longS = 600

export const warmUp: Detector = (view) => {
  const ect = view.columns.get('ect')
  if (!ect) return null
  const { low, high } = reach(ect, { from: 0, to: view.n - 1 })
  // A sensor that never moves belongs to the sensors, not to the thermostat.
  if (!(high - low > 3)) return null
  const cold = runsWhere(view, (i) => view.rpm[i]! > 300 && ect[i]! < warmC, longS, 30)
  const cooled: Rows[] = runsWhere(view, (i) => ect[i]! < warmC - 4, 30).filter(
    ({ from }) => from > 0 && reach(ect, { from: 0, to: from }).high > warmC + 5,
  )
  const runs = [...cold, ...cooled]
  return finding(
    view,
    runs,
    {
      kind: 'warm-up',
      urgency: 'look',
      title: cold.length > 0 ? 'The engine warms up slowly' : 'The coolant cools down again on the road',
      usually: 'A thermostat that stays open. Until it is mended the warm-up enrichment stays on and hides the cells.',
    },
    [
      ['warmest', high, '°C'],
      ['below 70 °C for', Math.max(...runs.map(({ from, to }) => view.timeS[to]! - view.timeS[from]!)) / 60, 'min'],
    ],
  )
}
