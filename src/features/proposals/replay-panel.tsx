/** A drive replayed with the table as decided so far: what was measured, and what the model says it would have read. */
import { AreaSeries, Axis, DataProvider, Grid as Lines, LineSeries, XYChart } from '@visx/xychart'
import { chartTheme } from '../../ui/chart-theme.ts'
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import type { Proposal, Replay } from '../../../shared/contract/proposals.ts'
import { formatClock, formatNumber } from '../../lib/format.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Loading } from '../../ui/loading.tsx'
import { useWidth } from '../../ui/use-width.ts'
import { proposalQueries } from './queries.ts'
import { runsOf, type ReplayPoint } from './replay-points.ts'

const theme = chartTheme('var(--color-ink)', 'var(--color-copper)')

/** Seconds shown at once. */
const windowS = 60

export default function ReplayPanel({ proposal }: { proposal: Proposal }) {
  const [logId, setLogId] = useState(proposal.logs[0]?.id ?? '')
  const [fromS, setFromS] = useState(0)
  const replay = useQuery(proposalQueries.replay(proposal, { logId, fromS, toS: fromS + windowS }))
  const lengthS = proposal.surface?.logs.find((log) => log.logId === logId)?.totalS ?? Infinity
  return (
    <div>
      <div className="flex flex-wrap items-end gap-3" role="group" aria-label="Stretch of the drive">
        <label className="block">
          <span className="mb-1 block font-semibold">Drive</span>
          <select
            className="h-(--control-h) max-w-full rounded-cut border border-rule-strong bg-sheet px-2"
            value={logId}
            onChange={(event) => {
              setLogId(event.target.value)
              setFromS(0)
            }}
          >
            {proposal.logs.map((log) => (
              <option key={log.id} value={log.id}>
                Log {log.number}, {log.title}
              </option>
            ))}
          </select>
        </label>
        <Button disabled={fromS === 0} onClick={() => setFromS(Math.max(0, fromS - windowS / 2))}>
          Earlier
        </Button>
        <Button disabled={fromS + windowS >= lengthS} onClick={() => setFromS(fromS + windowS / 2)}>
          Later
        </Button>
        <span role="status" className="mb-2 text-ink-faint">
          {formatClock(fromS)} to {formatClock(fromS + windowS)}
        </span>
      </div>
      {replay.isPending ? <Loading what="Replaying the drive" /> : null}
      {replay.isError ? <Banner title={replay.error.message}>The decisions are not touched by it.</Banner> : null}
      {replay.data ? <Panels replay={replay.data} /> : null}
    </div>
  )
}

const percent = (share: number) => `${formatNumber(100 * share)} %`

function Panels({ replay }: { replay: Replay }) {
  const { ref, width: free } = useWidth(340)
  const width = Math.max(240, Math.floor(free))
  const { measured, predicted } = replay.onTarget
  const all = [...replay.measured, ...replay.predicted, ...replay.target].filter((value) => value !== null)
  const domain: [number, number] = [Math.min(...all, 0.8), Math.max(...all, 1.1)]
  return (
    <div ref={ref} className="mt-3">
      <p>
        Within 3 % of the target over the whole drive: <b>{percent(measured)}</b> of the time as measured,{' '}
        <b>{percent(predicted)}</b> with the table as decided so far.
      </p>
      <Panel name="Measured" replay={replay} line="measured" domain={domain} width={width} />
      <Panel name="With the table as decided so far" replay={replay} line="predicted" domain={domain} width={width} />
      <p className="mt-1 text-small text-ink-quiet">
        Lambda. <b className="text-copper">Target</b> dashed; the band is 95 % of what the model knows. Closed loop is
        off in the replay. A line stops where the fuel was cut or the sensor was not ready.
      </p>
    </div>
  )
}

interface PanelProps {
  readonly name: string
  readonly replay: Replay
  readonly line: 'measured' | 'predicted'
  readonly domain: [number, number]
  readonly width: number
}

const x = (point: ReplayPoint) => point.t
const y = (point: ReplayPoint) => point.y

function Panel({ name, replay, line, domain, width }: PanelProps) {
  const runs = runsOf(replay, line)
  const known = runs.flat().map((point) => point.y)
  const summary =
    known.length === 0 ? 'no reading' : `lambda ${Math.min(...known).toFixed(2)} to ${Math.max(...known).toFixed(2)}`
  return (
    <figure className="chart mt-2">
      <figcaption className="text-small">
        <b>{name}</b>
      </figcaption>
      <DataProvider
        theme={theme}
        xScale={{ type: 'linear', zero: false, domain: [replay.timeS[0] ?? 0, replay.timeS.at(-1) ?? 1] }}
        yScale={{ type: 'linear', zero: false, domain }}
      >
        <XYChart
          width={width}
          height={130}
          margin={{ top: 6, right: 20, bottom: 22, left: 40 }}
          accessibilityLabel={`${name}, ${summary}`}
        >
          <Lines columns={false} numTicks={3} />
          <Axis orientation="left" numTicks={3} hideAxisLine />
          <Axis orientation="bottom" numTicks={width < 500 ? 3 : 6} tickFormat={formatClock} />
          {line === 'predicted'
            ? runs.map((run) => (
                <AreaSeries
                  key={`band ${run[0]!.t}`}
                  dataKey={`band ${run[0]!.t}`}
                  data={run}
                  xAccessor={x}
                  yAccessor={(point) => point.high}
                  y0Accessor={(point) => point.low}
                  fill="var(--color-copper)"
                  fillOpacity={0.16}
                  renderLine={false}
                />
              ))
            : null}
          {runsOf(replay, 'target').map((run) => (
            <LineSeries
              key={`target ${run[0]!.t}`}
              dataKey={`target ${run[0]!.t}`}
              data={run}
              xAccessor={x}
              yAccessor={y}
              stroke="var(--color-copper)"
              strokeWidth={1.4}
              strokeDasharray="5 3"
            />
          ))}
          {runs.map((run) => (
            <LineSeries
              key={`line ${run[0]!.t}`}
              dataKey={`line ${run[0]!.t}`}
              data={run}
              xAccessor={x}
              yAccessor={y}
              stroke="var(--color-ink)"
              strokeWidth={1.4}
            />
          ))}
        </XYChart>
      </DataProvider>
    </figure>
  )
}
