/** One channel over time: the band between lowest and highest readings, and the target where there is one. */
import { Axis, DataProvider, Grid, LineSeries, XYChart } from '@visx/xychart'
import { chartTheme } from '../chart-theme.ts'
import { formatClock } from '../../lib/format.ts'
import { TraceOverlay, type OverlayProps } from './trace-overlay.tsx'
import type { Trace } from '../../../shared/contract/logs.ts'

interface Point {
  readonly t: number
  readonly y: number
}

const theme = chartTheme('var(--color-ink)', 'var(--color-copper)')

/** Every stretch gives its lowest and highest reading in turn, so that no spike is lost between pixels. */
export function pointsOf(trace: Trace): Point[][] {
  const runs: Point[][] = []
  let run: Point[] = []
  trace.timeS.forEach((t, i) => {
    const low = trace.low[i] ?? null
    const high = trace.high[i] ?? null
    if (low === null || high === null) {
      if (run.length > 0) runs.push(run)
      run = []
      return
    }
    run.push({ t, y: low })
    if (high !== low) run.push({ t, y: high })
  })
  if (run.length > 0) runs.push(run)
  return runs
}

/** Room for the axes, px; the overlay lies on what is inside. */
const margin = { top: 6, right: 8, bottom: 24, left: 46 } as const

interface TracePanelProps {
  /** What lies over the plot; its from and to are the axis, s. */
  readonly overlay: Omit<OverlayProps, 'margin'>
  readonly name: string
  readonly trace: Trace
  readonly second?: Trace | undefined
  readonly width: number
  readonly height?: number
}

export function TracePanel({ overlay, name, trace, second, width, height = 120 }: TracePanelProps) {
  const { from, to } = overlay
  const values = [...trace.low, ...trace.high].filter((value) => value !== null)
  const summary =
    values.length === 0 ? 'no reading' : `from ${Math.min(...values)} to ${Math.max(...values)} ${trace.unit}`
  return (
    <figure className="chart border-b border-rule">
      <figcaption className="flex justify-between text-small">
        <b>{name}</b>
        <span className="text-ink-faint">{trace.unit}</span>
      </figcaption>
      <div className="relative overflow-hidden">
        <DataProvider
          theme={theme}
          xScale={{ type: 'linear', domain: [from, to], zero: false }}
          yScale={{ type: 'linear', zero: false, nice: true }}
        >
          <XYChart width={width} height={height} margin={margin} accessibilityLabel={`${name} over time, ${summary}`}>
            <Grid columns={false} numTicks={3} />
            <Axis orientation="left" numTicks={3} hideAxisLine />
            <Axis orientation="bottom" numTicks={width < 500 ? 4 : 8} tickFormat={(t: number) => formatClock(t)} />
            {pointsOf(trace).map((run, i) => (
              <LineSeries
                key={run[0]!.t}
                dataKey={`${name} ${i}`}
                data={run}
                xAccessor={(p) => p.t}
                yAccessor={(p) => p.y}
                stroke="var(--color-ink)"
                strokeWidth={1.2}
              />
            ))}
            {second
              ? pointsOf(second).map((run, i) => (
                  <LineSeries
                    key={run[0]!.t}
                    dataKey={`target ${i}`}
                    data={run}
                    xAccessor={(p) => p.t}
                    yAccessor={(p) => p.y}
                    stroke="var(--color-copper)"
                    strokeWidth={1.4}
                    strokeDasharray="5 3"
                  />
                ))
              : null}
          </XYChart>
        </DataProvider>
        <TraceOverlay {...overlay} margin={margin} />
      </div>
    </figure>
  )
}
