/** What the decisions come to in the engine: mean change at idle, cruise and load, and what the injectors must give. */
import { useQuery } from '@tanstack/react-query'
import { memo } from 'react'
import { valueAt, type Grid } from '../../../shared/grid.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { tableQueries } from '../tables/queries.ts'
import { vehicleQueries } from '../vehicles/queries.ts'
import { takenValue, type Decided } from './decisions.ts'
import { dutyLimitPct, highestDuty } from './duty.ts'
import { idleKpa, idleRpm, regionChanges } from './regions.ts'

const words = { idle: 'Idle', cruise: 'Cruise', load: 'Load' } as const

export const Summary = memo(function Summary({ decided, vehicleId }: { decided: Decided; vehicleId: string }) {
  const changes = regionChanges(decided)
  return (
    <section aria-label="What it comes to" className="mt-5">
      <dl className="flex flex-wrap gap-x-8 gap-y-2">
        {changes.map(({ region, cells, meanPct }) => (
          <div key={region}>
            <dt className="text-small text-ink-quiet">{words[region]}, mean change</dt>
            <dd className="font-semibold">
              {meanPct === null ? (
                'no evidence'
              ) : (
                <>
                  {formatSigned(meanPct, 1)} <span className="font-normal text-ink-faint">% over {cells} cells</span>
                </>
              )}
            </dd>
          </div>
        ))}
        <Duty decided={decided} vehicleId={vehicleId} />
      </dl>
      <p className="mt-2 text-small text-ink-faint">
        Each cell counts by its seconds. Idle is up to {idleRpm} rpm and {idleKpa} kPa, load is where the lean guard
        watches, cruise is the rest.
      </p>
    </section>
  )
})

/** The target in the engine, else the latest one. */
function useTarget(vehicleId: string): { grid: Grid; lambda: number[] } | null {
  const { data } = useQuery(tableQueries.list(vehicleId))
  const targets = data?.revisions.filter(({ kind }) => kind === 'target') ?? []
  const newest = targets.find(({ flashed }) => flashed) ?? targets[0]
  const { data: table } = useQuery({ ...tableQueries.detail(newest?.id ?? ''), enabled: newest !== undefined })
  return table ? { grid: table.grid, lambda: table.values.map((value) => value ?? Number.NaN) } : null
}

function Duty({ decided, vehicleId }: { decided: Decided; vehicleId: string }) {
  const sheet = useQuery(vehicleQueries.detail(vehicleId)).data?.sheet
  const target = useTarget(vehicleId)
  // Its place is kept, so that nothing moves when it arrives.
  if (!sheet || !target) return <div className="h-[2.625rem]" />
  const { grid, current } = decided.surface
  const lambdaOf = (rpm: number, mapKpa: number) => valueAt(target.grid, target.lambda, rpm, mapKpa)
  const now = highestDuty(sheet, grid, (cell) => current[cell] ?? Number.NaN, lambdaOf)
  const then = highestDuty(sheet, grid, (cell) => takenValue(decided, cell), lambdaOf)
  if (!now || !then) return null
  const place = `${grid.rpm[then.cell % grid.rpm.length]} rpm, ${grid.mapKpa[Math.floor(then.cell / grid.rpm.length)]} kPa`
  return (
    <div>
      <dt className="text-small text-ink-quiet">Highest injector duty, at {place}</dt>
      <dd className="font-semibold">
        {formatNumber(then.pct, 1)}{' '}
        <span className="font-normal text-ink-faint">%, now {formatNumber(now.pct, 1)} %</span>
        {then.pct > dutyLimitPct ? (
          <span className="block text-small font-normal text-copper">
            Above {dutyLimitPct} % injectors no longer meter well: the mixture goes lean where it must not.
          </span>
        ) : null}
      </dd>
    </div>
  )
}
