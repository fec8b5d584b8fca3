/** The vehicle's logs: upload, and what came of each. */
import { useQuery } from '@tanstack/react-query'
import { useParams } from 'react-router-dom'
import type { LogLine } from '../../../shared/contract/logs.ts'
import { formatBytes, formatDate, formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { ButtonLink, TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { Progress } from '../../ui/progress.tsx'
import { Status } from '../../ui/status.tsx'
import { vehicleQueries } from '../vehicles/queries.ts'
import { logWord } from './log-word.ts'
import { logQueries } from './queries.ts'
import { UploadForm } from './upload-form.tsx'

/** The conclusion the page opens with. */
export function logsSentence(logs: readonly LogLine[]): string {
  if (logs.length === 0) return 'No log has been uploaded yet'
  const dead = logs.filter((log) => log.worstHealth === 'dead').length
  const ready = logs.filter((log) => log.state === 'ready').length
  const minutes = logs.reduce((sum, log) => sum + log.durationS, 0) / 60
  if (dead > 0)
    return `A sensor is dead in ${dead === 1 ? 'one log' : `${dead} logs`}; ${formatNumber(ready)} of ${formatNumber(logs.length)} are ready`
  return `${formatNumber(ready)} of ${formatNumber(logs.length)} logs are ready, ${formatNumber(minutes)} minutes in all`
}

export default function LogsPage() {
  const { vehicleId = '' } = useParams()
  const logs = useQuery(logQueries.list(vehicleId))
  const vehicle = useQuery(vehicleQueries.detail(vehicleId))
  const mayUpload = useCan('log:upload')
  const seesWorkbench = useCan('proposal:read')
  usePageTitle('Logs')
  if (logs.isPending || vehicle.isPending) return <Loading what="Listing the logs" />
  if (logs.isError || vehicle.isError) return <Banner title="The logs could not be listed">Load the page again.</Banner>
  const all = logs.data.logs
  return (
    <Leaf>
      <PageHead
        folio="Logs"
        title={logsSentence(all)}
        actions={
          seesWorkbench && all.some((log) => log.state === 'ready') ? (
            <ButtonLink variant="solid" to={paths.workbench(vehicleId)}>
              Open the workbench
            </ButtonLink>
          ) : null
        }
      />
      {mayUpload ? (
        <Entry
          title="Upload"
          aside={
            <>
              <Note icon="info" head="What a log must hold">
                <p>
                  Engine speed, manifold pressure and lambda. Coolant, intake air, throttle and the controller’s
                  corrections make it better.
                </p>
              </Note>
              <Note icon="caution" kind="caution" head="Who records">
                <p>A passenger, a dyno or a parked vehicle. The driver drives.</p>
              </Note>
            </>
          }
        >
          <UploadForm vehicleId={vehicleId} inEngineId={vehicle.data.flashedRevisionId} />
        </Entry>
      ) : null}
      <Entry title="Logs" note={`${formatNumber(all.length)}, newest first`}>
        {all.length === 0 ? (
          <Empty title="Nothing here yet">
            Start with the key on and the engine off: that shows which sensors tell the truth.
          </Empty>
        ) : (
          <Ledger
            caption="Logs, newest first"
            head={['Recorded', 'Log', 'Title', 'Length', 'With', 'State']}
            numeric={[3]}
            stack
          >
            {all.map((log) => (
              <tr key={log.id}>
                <td>{log.recordedOn ? formatDate(log.recordedOn) : formatDate(log.uploadedAt)}</td>
                <th scope="row">
                  <TextLink to={paths.log(vehicleId, log.id)}>Log {log.number}</TextLink>
                </th>
                <td className="wide-cell">
                  {log.title}
                  <span className="block text-small text-ink-faint">
                    {log.fileName}, {formatBytes(log.bytes)}
                  </span>
                  {log.trouble ? <span className="block text-small">{log.trouble}</span> : null}
                </td>
                <td className="num">{formatNumber(log.durationS / 60, 1)} min</td>
                <td>{log.flashedRevision ? `revision ${log.flashedRevision.number}` : 'not said'}</td>
                <td>
                  {log.state === 'reading' || log.state === 'received' ? (
                    <Progress value={log.progress} label={logWord(log)} />
                  ) : (
                    <Status state={logWord(log)} />
                  )}
                </td>
              </tr>
            ))}
          </Ledger>
        )}
      </Entry>
    </Leaf>
  )
}
