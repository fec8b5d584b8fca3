/**
 * Two faults that bend the mixture by how much passes: air that leaks in goes as 1 / air flow, a wrong injector dead time as
 * 1 / fuel per injection. Both straight lines are laid through settled readings, and only the better one may speak.
 */
import type { Finding } from '../../../shared/contract/logs.ts'
import { finding, quantile, runsWhere, type Detector, type DriveView } from './view.ts'

interface Line {
  /** Change of ln lambda from the highest tenth of the flow to the lowest. */
  readonly effect: number
  /** Share of the spread of the tenths that the line explains, 0 to 1. */
  readonly explained: number
}

/** Through the means of ten equally filled bins, so that long stretches at one place do not rule. */
function lineThrough(x: readonly number[], y: readonly number[]): Line | null {
  const order = x.map((_, i) => i).sort((a, b) => x[a]! - x[b]!)
  const size = Math.floor(order.length / 10)
  if (size < 20) return null
  const mean = (values: readonly number[]): number => values.reduce((sum, v) => sum + v, 0) / values.length
  const bins = Array.from({ length: 10 }, (_, b) => order.slice(b * size, (b + 1) * size))
  const bx = bins.map((bin) => mean(bin.map((i) => x[i]!)))
  const by = bins.map((bin) =>
    quantile(
      bin.map((i) => y[i]!),
      0.5,
    ),
  )
  const mx = mean(bx)
  const my = mean(by)
  const sxx = bx.reduce((sum, v) => sum + (v - mx) ** 2, 0)
  const syy = by.reduce((sum, v) => sum + (v - my) ** 2, 0)
  const sxy = bx.reduce((sum, v, i) => sum + (v - mx) * (by[i]! - my), 0)
  if (sxx === 0 || syy === 0) return null
  return { effect: (sxy / sxx) * (bx[9]! - bx[0]!), explained: (sxy * sxy) / sxx / syy }
}

/** Readings in settled running, with the closed loop's work put back. */
function settledRows(view: DriveView): number[] {
  const back = Math.max(1, Math.round(0.6 / view.dtS))
  const { lambda } = view
  const { lambdaLow, lambdaHigh } = view.facts
  if (!lambda) return []
  const rows: number[] = []
  for (let i = back; i < view.n; i += 1) {
    const isSteady =
      Math.abs(view.map[i]! - view.map[i - back]!) < 3 && Math.abs(view.rpm[i]! / view.rpm[i - back]! - 1) < 0.06
    const isRead = lambda[i]! > lambdaLow + 0.012 && lambda[i]! < lambdaHigh - 0.012
    if (isSteady && isRead && view.sinceCutS[i]! > 2 && view.rpm[i]! > 300 && view.ratio[i]! > 0) rows.push(i)
  }
  return rows
}

interface Patterns {
  readonly rows: readonly number[]
  readonly leak: Line | null
  readonly deadTime: Line | null
}

function patternsOf(view: DriveView): Patterns {
  const pulse = view.columns.get('pulseWidth')
  const trim = view.columns.get('trim')
  const rows = settledRows(view)
  const off = rows.map((i) => Math.log(view.ratio[i]! * (1 + (trim?.[i] ?? 0) / 100)))
  const leak = lineThrough(
    rows.map((i) => 1e4 / (view.rpm[i]! * view.map[i]!)),
    off,
  )
  const deadTime = pulse
    ? lineThrough(
        rows.map((i) => 1 / Math.max(0.2, pulse[i]! - view.facts.deadTimeMs)),
        off,
      )
    : null
  return { rows, leak, deadTime }
}

const leastEffect = 0.05
const leastExplained = 0.8

function speak(
  view: DriveView,
  rows: readonly number[],
  line: Line,
  words: Parameters<typeof finding>[2],
): Finding | null {
  const flows = rows.map((i) => view.rpm[i]! * view.map[i]!)
  const small = quantile(flows, 0.15)
  const inside = new Set(rows.filter((_, k) => flows[k]! <= small))
  return finding(
    view,
    runsWhere(view, (i) => inside.has(i), 2, 1),
    words,
    [
      ['change of lambda from high to low flow', 100 * (Math.exp(line.effect) - 1), '%'],
      ['explained by the pattern', 100 * line.explained, '%'],
    ],
  )
}

export const leakPattern: Detector = (view) => {
  const { rows, leak, deadTime } = patternsOf(view)
  if (!leak || leak.effect < leastEffect || leak.explained < leastExplained) return null
  if (deadTime && deadTime.explained > leak.explained) return null
  return speak(view, rows, leak, {
    kind: 'leak',
    urgency: 'look',
    title: 'Leaner the less air passes, as with a leak',
    usually:
      'Air enters where it is not counted: an inlet gasket or hose, or the exhaust before the sensor. Mend it before these cells are changed.',
  })
}

export const deadTimePattern: Detector = (view) => {
  const { rows, leak, deadTime } = patternsOf(view)
  if (!deadTime || Math.abs(deadTime.effect) < leastEffect || deadTime.explained < leastExplained) return null
  if (leak && leak.effect > 0 && leak.explained >= deadTime.explained) return null
  return speak(view, rows, deadTime, {
    kind: 'dead-time',
    urgency: 'look',
    title: `${deadTime.effect > 0 ? 'Leaner' : 'Richer'} the shorter the pulse, as with a wrong injector dead time`,
    usually:
      'The dead time in the controller is not the injectors’ own at this voltage and pressure. Set it first: it moves every small-pulse cell at once.',
  })
}
