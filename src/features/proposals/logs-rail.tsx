/** Which logs feed the proposal, how much of each could be used, and what was left out and why. */
import type { LeftOut, Proposal } from '../../../shared/contract/proposals.ts'
import { Link } from 'react-router-dom'
import { formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'

const minutes = (seconds: number): string => formatNumber(seconds / 60, seconds < 600 ? 1 : 0)

/** "12 % left out: fuel cut 7 %, cold 4 %". */
export function leftOutSentence({ totalS, leftOutS }: LeftOut): string {
  const parts = Object.entries(leftOutS)
    .filter(([, seconds]) => seconds / totalS >= 0.005)
    .sort((a, b) => b[1] - a[1])
  if (parts.length === 0) return 'nothing left out'
  const total = parts.reduce((sum, [, seconds]) => sum + seconds, 0)
  const share = (seconds: number) => `${formatNumber((100 * seconds) / totalS)} %`
  return `${share(total)} left out: ${parts.map(([name, seconds]) => `${name} ${share(seconds)}`).join(', ')}`
}

export function LogsRail({ proposal, vehicleId }: { proposal: Proposal; vehicleId: string }) {
  const leftOut = proposal.surface?.leftOut ?? []
  const total = leftOut.reduce((sum, log) => sum + log.usedS, 0)
  return (
    <section aria-label="Logs behind this proposal">
      <h2 className="font-semibold">Logs</h2>
      <ul className="mt-2 flex flex-col gap-x-6 laptop:flex-row desk:flex-col">
        {proposal.logs.map((log) => {
          const used = leftOut.find((entry) => entry.logId === log.id)
          return (
            <li key={log.id} className="flex-1 border-b border-rule py-2">
              <p className="flex justify-between gap-2">
                <Link className="font-semibold underline underline-offset-3" to={paths.log(vehicleId, log.id)}>
                  Log {log.number}
                </Link>
                {used ? (
                  <span>
                    {minutes(used.usedS)} <span className="text-ink-faint">min</span>
                  </span>
                ) : null}
              </p>
              <p className="text-small text-ink-quiet">{log.title}</p>
              {used ? <p className="text-small text-ink-faint">{leftOutSentence(used)}</p> : null}
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
    </section>
  )
}
