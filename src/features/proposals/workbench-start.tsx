/** Before there is a proposal: choose the logs to learn from. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useNavigate } from 'react-router-dom'
import type { LogLine } from '../../../shared/contract/logs.ts'
import { formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, ButtonLink } from '../../ui/button.tsx'
import { Checkbox } from '../../ui/field.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, PageHead } from '../../ui/leaf.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { logQueries } from '../logs/queries.ts'
import { tableQueries } from '../tables/queries.ts'
import { useRequestProposal } from './queries.ts'

export function WorkbenchStart({ vehicleId }: { vehicleId: string }) {
  const logs = useQuery(logQueries.list(vehicleId))
  const tables = useQuery(tableQueries.list(vehicleId))
  const mayLearn = useCan('proposal:edit')
  if (logs.isPending || tables.isPending) return <Loading what="Looking for logs and tables" />
  if (logs.isError || tables.isError) return <Banner title="The logs could not be listed">Load the page again.</Banner>
  const ready = logs.data.logs.filter((log) => log.state === 'ready')
  const kinds = new Set(tables.data.revisions.map((revision) => revision.kind))
  if (!kinds.has('ve') || !kinds.has('target')) {
    return (
      <Empty
        title={kinds.has('ve') ? 'The vehicle has no target table yet' : 'The vehicle has no fuel table yet'}
        action={
          <ButtonLink variant="solid" to={paths.tables(vehicleId)}>
            Bring the table
          </ButtonLink>
        }
      >
        Learning compares what the wideband measured with what was asked for, so it needs both tables.
      </Empty>
    )
  }
  if (ready.length === 0) {
    return (
      <Empty
        title="No log is ready to learn from"
        action={
          <ButtonLink variant="solid" to={paths.logs(vehicleId)}>
            Upload a log
          </ButtonLink>
        }
      >
        Any CSV with engine speed, manifold pressure and lambda will do.
      </Empty>
    )
  }
  return <ChooseLogs vehicleId={vehicleId} logs={ready} mayLearn={mayLearn} />
}

function ChooseLogs({ vehicleId, logs, mayLearn }: { vehicleId: string; logs: readonly LogLine[]; mayLearn: boolean }) {
  const usable = logs.filter((log) => log.flashedRevision !== null)
  const [chosen, setChosen] = useState<ReadonlySet<string>>(new Set(usable.map((log) => log.id)))
  const request = useRequestProposal(vehicleId)
  const navigate = useNavigate()
  const learn = async () => {
    const proposal = await request.mutateAsync({ logIds: [...chosen], stepCapPct: 20 })
    await navigate(paths.proposal(vehicleId, proposal.id))
  }
  return (
    <>
      <PageHead
        folio="Workbench"
        title={`${formatNumber(chosen.size)} of ${formatNumber(logs.length)} logs to learn from`}
        lead="Each log is compared with the table that was in the engine when it was recorded. Logs add up."
        actions={
          mayLearn ? (
            <Button
              variant="solid"
              disabled={chosen.size === 0 || request.isPending}
              onClick={() => void learn().catch(() => undefined)}
            >
              Learn from {formatNumber(chosen.size)} {chosen.size === 1 ? 'log' : 'logs'}
            </Button>
          ) : null
        }
      />
      {request.isError ? (
        <Banner title={request.error.message}>Nothing was started; your choice is kept.</Banner>
      ) : null}
      <Entry
        title="Logs"
        aside={
          <Note icon="info" head="Logs that do not belong">
            <p>A drive with a dead sensor, another fuel or other injectors teaches the wrong lesson. Leave it out.</p>
          </Note>
        }
      >
        <ul>
          {logs.map((log) => (
            <li key={log.id} className="border-b border-rule py-2">
              <Checkbox
                label={`Log ${log.number}, ${log.title}, ${formatNumber(log.durationS / 60, 1)} min`}
                hint={
                  log.flashedRevision
                    ? `Recorded with revision ${log.flashedRevision.number}${log.worstHealth === 'dead' ? '; a sensor is dead in it' : ''}`
                    : 'Say first which revision was in the engine: open the log'
                }
                checked={chosen.has(log.id)}
                disabled={!mayLearn || log.flashedRevision === null}
                onChange={(event) => {
                  const next = new Set(chosen)
                  if (event.target.checked) next.add(log.id)
                  else next.delete(log.id)
                  setChosen(next)
                }}
              />
            </li>
          ))}
        </ul>
      </Entry>
    </>
  )
}
