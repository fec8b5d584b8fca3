/** Which logs feed the proposal, how much of each could be used and why not more; switched on and off here. */
import { TriangleAlert } from 'lucide-react'
import { Link } from 'react-router-dom'
import type { LogShare, Proposal } from '../../../shared/contract/proposals.ts'
import { formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { useChooseLogs } from './queries.ts'

const minutes = (seconds: number): string => formatNumber(seconds / 60, seconds < 600 ? 1 : 0)

/** "12 % left out: fuel cut 7 %, cold 4 %". */
export function leftOutSentence({ totalS, leftOutS }: Pick<LogShare, 'totalS' | 'leftOutS'>): string {
  const parts = Object.entries(leftOutS)
    .filter(([, seconds]) => seconds / totalS >= 0.005)
    .sort((a, b) => b[1] - a[1])
  if (parts.length === 0) return 'nothing left out'
  const total = parts.reduce((sum, [, seconds]) => sum + seconds, 0)
  const share = (seconds: number) => `${formatNumber((100 * seconds) / totalS)} %`
  return `${share(total)} left out: ${parts.map(([name, seconds]) => `${name} ${share(seconds)}`).join(', ')}`
}

/** Above this a log speaks of another engine than the others do. */
const disagrees = 2

interface LogsRailProps {
  readonly proposal: Proposal
  readonly vehicleId: string
  /** False while decisions are on their way: the version would be the wrong one. */
  readonly maySwitch: boolean
}

export function LogsRail({ proposal, vehicleId, maySwitch }: LogsRailProps) {
  const shares = proposal.surface?.logs ?? []
  const total = shares.reduce((sum, log) => sum + log.usedS, 0)
  const choose = useChooseLogs(proposal.id)
  const used = proposal.logs.filter((log) => log.used)
  const switchLog = (id: string, on: boolean) =>
    choose.mutate({
      version: proposal.version,
      logIds: proposal.logs.filter((log) => (log.id === id ? on : log.used)).map((log) => log.id),
    })
  return (
    <section aria-label="Logs behind this proposal" aria-busy={choose.isPending}>
      <h2 className="font-semibold">Logs</h2>
      <ul className="mt-2 flex flex-col gap-x-6 laptop:flex-row desk:flex-col">
        {proposal.logs.map((log) => {
          const share = shares.find((entry) => entry.logId === log.id)
          const isLast = log.used && used.length === 1
          return (
            <li key={log.id} className={`flex-1 border-b border-rule py-2 ${log.used ? '' : 'text-ink-faint'}`}>
              <p className="flex items-baseline justify-between gap-2">
                <span className="flex items-baseline gap-2">
                  {proposal.logs.length > 1 ? (
                    <input
                      type="checkbox"
                      className="size-4 self-center accent-copper"
                      aria-label={`Learn from Log ${log.number}`}
                      checked={log.used}
                      disabled={!maySwitch || isLast || choose.isPending}
                      title={isLast ? 'At least one log must speak' : undefined}
                      onChange={(event) => switchLog(log.id, event.target.checked)}
                    />
                  ) : null}
                  <Link className="font-semibold underline underline-offset-3" to={paths.log(vehicleId, log.id)}>
                    Log {log.number}
                  </Link>
                </span>
                {share ? (
                  <span>
                    {minutes(share.usedS)} <span className="text-ink-faint">min</span>
                  </span>
                ) : (
                  <span>switched off</span>
                )}
              </p>
              <p className="text-small text-ink-quiet">{log.title}</p>
              {share ? <p className="text-small text-ink-faint">{leftOutSentence(share)}</p> : null}
              {(share?.disagreement ?? 0) > disagrees ? (
                <p className="mt-1 flex items-start gap-1.5 text-small text-copper">
                  <TriangleAlert size={14} strokeWidth={2.25} aria-hidden className="mt-0.5 shrink-0" />
                  Disagrees with the other logs more than chance explains. Did something change: sensor, injectors,
                  fuel, a leak? Then switch it off, or learn from it alone.
                </p>
              ) : null}
            </li>
          )
        })}
      </ul>
      <p className="flex justify-between border-b-4 border-double border-ink py-2">
        <span>Learned from</span>
        <b>
          {minutes(total)} <span className="font-normal text-ink-faint">min</span>
        </b>
      </p>
      {choose.error ? (
        <p role="alert" className="mt-2 text-small font-semibold">
          {choose.error.message}
        </p>
      ) : null}
    </section>
  )
}
