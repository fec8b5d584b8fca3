/** The readings behind a cell: as VE by log, their lambda error over time and over position, and the stretches they come from. */
import { Axis, DataProvider, GlyphSeries, Grid as Lines, XYChart } from '@visx/xychart'
import { chartTheme } from '../../ui/chart-theme.ts'
import { useQuery } from '@tanstack/react-query'
import { useDeferredValue } from 'react'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { formatClock, formatNumber, formatSigned } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { TextLink } from '../../ui/button.tsx'
import { Loading } from '../../ui/loading.tsx'
import type { Surface } from './decisions.ts'
import { stretchesOf, type Sample } from './evidence.ts'
import { proposalQueries } from './queries.ts'

const theme = chartTheme('var(--color-ink)')

interface CellSamplesProps {
  readonly proposal: Proposal & { surface: Surface }
  readonly cell: number
}

export default function CellSamples({ proposal, cell }: CellSamplesProps) {
  const settled = useDeferredValue(cell)
  const query = useQuery(proposalQueries.samples(proposal, settled))
  if (query.isPending || settled !== cell) return <Loading what="Fetching the samples" />
  if (query.isError) return <Banner title={query.error.message}>Load the page again.</Banner>
  const { samples } = query.data
  if (samples.length === 0) return <p className="text-ink-quiet">No reading lies near enough to this cell to show.</p>
  return <Samples proposal={proposal} cell={cell} samples={samples} />
}

function Samples({ proposal, cell, samples }: CellSamplesProps & { samples: readonly Sample[] }) {
  const { surface } = proposal
  const { rpm, mapKpa } = surface.grid
  const col = cell % rpm.length
  const row = Math.floor(cell / rpm.length)
  const fitted = surface.fitted[cell] ?? Number.NaN
  const error = ({ ve }: Sample) => 100 * (ve / fitted - 1)
  const around = (axis: readonly number[], at: number): [number, number] => [
    axis[Math.max(0, at - 1)]!,
    axis[Math.min(axis.length - 1, at + 1)]!,
  ]
  const spread = Math.max(3, ...samples.map((sample) => Math.abs(error(sample))))
  const sd = Math.sqrt(samples.reduce((sum, sample) => sum + error(sample) ** 2, 0) / samples.length)
  return (
    <div>
      <p className="text-small text-ink-quiet">
        {formatNumber(samples.length)} readings, thinned evenly; they scatter by {formatNumber(sd, 1)} % (root mean
        square) around the fit. Lambda error: plus is leaner than the fit explains.
      </p>
      {proposal.logs
        .filter(({ id }) => samples.some(({ logId }) => logId === id))
        .map((log) => (
          <Scatter
            key={log.id}
            name={`Log ${log.number}, over time`}
            unit="% against the clock"
            samples={samples.filter(({ logId }) => logId === log.id)}
            x={({ timeS }) => timeS}
            y={error}
            spread={spread}
            tick={formatClock}
          />
        ))}
      <Scatter
        name="Over position, rpm"
        unit="%"
        samples={samples}
        x={(sample) => sample.rpm}
        y={error}
        spread={spread}
        domain={around(rpm, col)}
        tick={(value) => formatNumber(value)}
      />
      <Scatter
        name="Over position, kPa"
        unit="%"
        samples={samples}
        x={(sample) => sample.mapKpa}
        y={error}
        spread={spread}
        domain={around(mapKpa, row)}
        tick={(value) => formatNumber(value)}
      />
      <Stretches proposal={proposal} samples={samples} />
    </div>
  )
}

interface ScatterProps {
  readonly name: string
  readonly unit: string
  readonly samples: readonly Sample[]
  readonly x: (sample: Sample) => number
  readonly y: (sample: Sample) => number
  /** The panels share one scale, % both ways. */
  readonly spread: number
  readonly domain?: [number, number]
  readonly tick: (value: number) => string
}

function Scatter({ name, unit, samples, x, y, spread, domain, tick }: ScatterProps) {
  const mean = samples.reduce((sum, sample) => sum + y(sample), 0) / samples.length
  return (
    <figure className="chart mt-3">
      <figcaption className="flex justify-between text-small">
        <b>{name}</b>
        <span className="text-ink-faint">{unit}</span>
      </figcaption>
      <DataProvider
        theme={theme}
        xScale={{ type: 'linear', zero: false, ...(domain ? { domain } : {}) }}
        yScale={{ type: 'linear', domain: [-spread, spread] }}
      >
        <XYChart
          width={288}
          height={96}
          margin={{ top: 4, right: 14, bottom: 22, left: 34 }}
          accessibilityLabel={`Lambda error, ${name}: ${samples.length} readings, mean ${formatSigned(mean, 1)} %`}
        >
          <Lines columns={false} numTicks={3} />
          <Axis orientation="left" numTicks={3} hideAxisLine />
          <Axis orientation="bottom" numTicks={3} tickFormat={tick} />
          <GlyphSeries
            dataKey={name}
            data={[...samples]}
            xAccessor={x}
            yAccessor={y}
            renderGlyph={({ x: left, y: top }) => (
              <rect x={left - 1.5} y={top - 1.5} width={3} height={3} fill="var(--color-ink)" fillOpacity={0.42} />
            )}
          />
        </XYChart>
      </DataProvider>
    </figure>
  )
}

/** The stretches with most readings, each with the way to its place on the trace. */
function Stretches({ proposal, samples }: { proposal: Proposal; samples: readonly Sample[] }) {
  const stretches = stretchesOf(samples)
  const most = stretches.toSorted((a, b) => b.samples - a.samples).slice(0, 6)
  return (
    <table className="ledger mt-4">
      <caption className="text-left font-semibold">
        {stretches.length === 1
          ? 'One stretch'
          : `${formatNumber(stretches.length)} stretches, those with most readings`}
      </caption>
      <thead>
        <tr>
          <th scope="col">On the trace</th>
          <th scope="col" className="num">
            Readings
          </th>
          <th scope="col" className="num">
            Own VE, %
          </th>
        </tr>
      </thead>
      <tbody>
        {most.map((stretch) => {
          const log = proposal.logs.find(({ id }) => id === stretch.logId)
          return (
            <tr key={`${stretch.logId}-${stretch.fromS}`}>
              <td>
                <TextLink to={paths.logAt(proposal.vehicleId, stretch.logId, stretch.fromS, stretch.toS)}>
                  Log {log?.number}, {formatClock(stretch.fromS)}
                </TextLink>
              </td>
              <td className="num">{formatNumber(stretch.samples)}</td>
              <td className="num">{formatNumber(stretch.ve, 1)}</td>
            </tr>
          )
        })}
      </tbody>
    </table>
  )
}
