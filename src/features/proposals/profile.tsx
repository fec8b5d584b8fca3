/** The table cut through the selected cell, along its row and its column: current against decided, with the doubt. */
import { AreaSeries, Axis, DataProvider, GlyphSeries, Grid as Lines, LineSeries, XYChart } from '@visx/xychart'
import { chartTheme } from '../../ui/chart-theme.ts'
import { memo } from 'react'
import { formatNumber } from '../../lib/format.ts'
import { useWidth } from '../../ui/use-width.ts'
import type { Decided } from './decisions.ts'
import { profileOf, type Cut, type ProfilePoint } from './profile-points.ts'

const theme = chartTheme('var(--color-slate)', 'var(--color-copper)')

const x = (point: ProfilePoint) => point.at

export default memo(Profile)

function Profile({ decided, cell }: { decided: Decided; cell: number }) {
  return (
    <section aria-label="Profile through the cell" className="mt-7">
      <h2 className="font-semibold">Through the cell</h2>
      <p className="text-small text-ink-quiet">
        <b className="text-copper">Decided or proposed</b> with its 95 % band where a log has been,{' '}
        <b className="text-slate">current</b> dashed. VE, %.
      </p>
      <div className="mt-2 grid gap-x-6 gap-y-4 sm:grid-cols-2">
        <CutChart decided={decided} cell={cell} cut="rpm" />
        <CutChart decided={decided} cell={cell} cut="load" />
      </div>
    </section>
  )
}

function CutChart({ decided, cell, cut }: { decided: Decided; cell: number; cut: Cut }) {
  const { ref, width } = useWidth(340)
  const { grid } = decided.surface
  const points = profileOf(decided, cell, cut)
  const here = points.find((point) => point.cell === cell)!
  const fixed =
    cut === 'rpm' ? `${grid.mapKpa[Math.floor(cell / grid.rpm.length)]} kPa` : `${grid.rpm[cell % grid.rpm.length]} rpm`
  const unit = cut === 'rpm' ? 'rpm' : 'kPa'
  const sentence = `VE along ${unit} at ${fixed}: at the cell ${formatNumber(here.current, 1)} now, ${formatNumber(here.after, 1)} decided or proposed`
  return (
    <figure ref={ref} className="chart min-w-0">
      <figcaption className="flex justify-between text-small">
        <b>At {fixed}</b>
        <span className="text-ink-faint">{unit}</span>
      </figcaption>
      <DataProvider
        theme={theme}
        xScale={{ type: 'linear', zero: false }}
        yScale={{ type: 'linear', zero: false, nice: true }}
      >
        <XYChart
          width={Math.max(240, Math.floor(width))}
          height={170}
          margin={{ top: 6, right: 10, bottom: 24, left: 34 }}
          accessibilityLabel={sentence}
        >
          <Lines columns={false} numTicks={4} />
          <Axis orientation="left" numTicks={4} hideAxisLine />
          <Axis orientation="bottom" numTicks={5} tickFormat={(value: number) => formatNumber(value)} />
          <AreaSeries
            dataKey="band"
            data={points}
            xAccessor={x}
            yAccessor={(point) => point.high}
            y0Accessor={(point) => point.low}
            fill="var(--color-copper)"
            fillOpacity={0.16}
            renderLine={false}
          />
          <LineSeries
            dataKey="current"
            data={points}
            xAccessor={x}
            yAccessor={(point) => point.current}
            stroke="var(--color-slate)"
            strokeDasharray="5 3"
            strokeWidth={1.4}
          />
          <LineSeries
            dataKey="after"
            data={points}
            xAccessor={x}
            yAccessor={(point) => point.after}
            stroke="var(--color-copper)"
            strokeWidth={1.6}
          />
          <GlyphSeries
            dataKey="here"
            data={[here]}
            xAccessor={x}
            yAccessor={(point) => point.after}
            renderGlyph={({ x: left, y: top }) => (
              <rect x={left - 4} y={top - 4} width={8} height={8} fill="var(--color-ink)" />
            )}
          />
        </XYChart>
      </DataProvider>
    </figure>
  )
}
