/** Intake air that heats up while the vehicle stands: the sensor soaks more than the air the engine breathes. */
import { finding, quantile, reach, runsWhere, type Detector } from './view.ts'

const leastRiseC = 15

export const heatSoak: Detector = (view) => {
  const iat = view.columns.get('iat')
  if (!iat) return null
  const moving = Array.from(iat).filter((_, i) => view.idle[i] === 0 && view.rpm[i]! > 300)
  if (moving.length < 100) return null
  const usual = quantile(moving, 0.25)
  const runs = runsWhere(view, (i) => view.rpm[i]! < 1.6 * view.idleRpm && iat[i]! > usual + leastRiseC, 5, 2)
  return finding(
    view,
    runs,
    {
      kind: 'heat-soak',
      urgency: 'note',
      title: 'The intake air sensor heats up at idle',
      usually:
        'Heat from the engine reaches the sensor faster than it reaches the air; the controller then takes fuel away and the idle reads lean. Cells learned here carry that error.',
    },
    [
      ['hottest', Math.max(...runs.map((run) => reach(iat, run).high)), '°C'],
      ['while driving', usual, '°C'],
    ],
  )
}
