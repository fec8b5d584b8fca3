/** Idle speed that swings to and fro with a period. */
import { finding, runsWhere, type Detector, type DriveView, type Rows } from './view.ts'

const leastAmplitudeRpm = 35
/** How much of the swing must come again one period later, 0 to 1. */
const leastRepeat = 0.5

interface Swing {
  readonly run: Rows
  readonly periodS: number
  readonly amplitudeRpm: number
}

/** Period by the first peak of the autocorrelation after its first fall below zero; null where nothing swings. */
function swingOf(view: DriveView, run: Rows): Swing | null {
  const speed = Array.from(view.rpm.subarray(run.from, run.to + 1))
  const mean = speed.reduce((sum, value) => sum + value, 0) / speed.length
  const apart = speed.map((value) => value - mean)
  const variance = apart.reduce((sum, value) => sum + value * value, 0) / apart.length
  const amplitudeRpm = Math.sqrt(2 * variance)
  if (!(amplitudeRpm >= leastAmplitudeRpm)) return null
  const repeat = (lag: number): number => {
    let sum = 0
    for (let i = lag; i < apart.length; i += 1) sum += apart[i]! * apart[i - lag]!
    return sum / (apart.length - lag) / variance
  }
  const longest = Math.min(Math.floor(apart.length / 2), Math.round(5 / view.dtS))
  let lag = 1
  while (lag < longest && repeat(lag) > 0) lag += 1
  let best = lag
  for (let at = lag; at <= longest; at += 1) if (repeat(at) > repeat(best)) best = at
  // Twice the period repeats as well: the first peak that is nearly as high is the period.
  for (let at = lag + 1; at < best; at += 1)
    if (repeat(at) > 0.85 * repeat(best) && repeat(at) >= repeat(at - 1) && repeat(at) >= repeat(at + 1)) {
      best = at
      break
    }
  return repeat(best) >= leastRepeat ? { run, periodS: best * view.dtS, amplitudeRpm } : null
}

export const hunting: Detector = (view) => {
  // The first second still slows down from the drive; it is no swing.
  const settled = runsWhere(view, (i) => view.idle[i] === 1, 7).map(({ from, to }) => ({
    from: Math.min(to, from + Math.round(2.5 / view.dtS)),
    to,
  }))
  const swings = settled.flatMap((run) => swingOf(view, run) ?? [])
  const worst = [...swings].sort((a, b) => b.amplitudeRpm - a.amplitudeRpm)[0]
  return finding(
    view,
    swings.map(({ run }) => run),
    {
      kind: 'hunting',
      urgency: 'look',
      title: 'The idle hunts',
      usually: 'Idle cells that change steeply from one to the next, or an idle control or closed loop set too strong.',
    },
    [
      ['period', worst?.periodS ?? 0, 's'],
      ['amplitude', worst?.amplitudeRpm ?? 0, '1/min'],
    ],
  )
}
