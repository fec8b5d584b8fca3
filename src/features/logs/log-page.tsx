/** One log: what is wrong with its sensors first, then its traces, its columns, and what was left out while reading. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useNavigate, useParams } from 'react-router-dom'
import type { Log } from '../../../shared/contract/logs.ts'
import { formatBytes, formatLongDate, formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Confirm } from '../../ui/confirm.tsx'
import { Select } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { Progress } from '../../ui/progress.tsx'
import { Status } from '../../ui/status.tsx'
import { tableQueries } from '../tables/queries.ts'
import { channelWords } from './channel-words.ts'
import { LogLooks } from './log-looks.tsx'
import { MappingForm } from './mapping-form.tsx'
import { logQueries, useLogChanges } from './queries.ts'

const healthWord = { dead: 'Dead', caution: 'Caution', sound: 'Sound', absent: 'Absent' } as const

/** The conclusion the page opens with. */
export function logSentence(log: Log): string {
  if (log.state === 'received' || log.state === 'reading') return 'The log is being read'
  if (log.state === 'rejected') return 'This file could not be read as a log'
  if (log.state === 'failed') return 'Reading stopped with a fault'
  if (log.state === 'needs-mapping') return 'One question is open before the log can be used'
  const dead = log.health.filter(({ state }) => state === 'dead')
  const caution = log.health.filter(({ state }) => state === 'caution').length
  if (dead.length > 0)
    return `${dead.map(({ channel }) => channelWords[channel]).join(' and ')} ${dead.length === 1 ? 'is' : 'are'} dead in this log`
  return caution > 0
    ? `The sensors are alive; ${caution} ${caution === 1 ? 'wants' : 'want'} a look`
    : 'Every sensor in this log is sound'
}

export default function LogPage() {
  const { vehicleId = '', logId = '' } = useParams()
  const log = useQuery(logQueries.detail(logId))
  usePageTitle(log.data ? `Log ${log.data.number}` : 'Log')
  if (log.isPending) return <Loading what="Opening the log" />
  if (log.isError) {
    return (
      <Leaf>
        <Banner title={log.error.message}>Go back to the list of logs.</Banner>
      </Leaf>
    )
  }
  return <LogView key={`${log.data.id}-${log.data.version}-${log.data.state}`} log={log.data} vehicleId={vehicleId} />
}

function LogView({ log, vehicleId }: { log: Log; vehicleId: string }) {
  const mayEdit = useCan('log:upload')
  const changes = useLogChanges(log.id)
  const dead = log.health.filter(({ state }) => state === 'dead')
  const digits = (value: number | null) =>
    value === null ? '' : formatNumber(value, Math.abs(value) < 10 ? 2 : Math.abs(value) < 100 ? 1 : 0)
  return (
    <Leaf>
      <PageHead
        folio={
          <>
            <span>Log {log.number}</span>
            <span>{log.title}</span>
            <span>{log.recordedOn ? formatLongDate(log.recordedOn) : null}</span>
          </>
        }
        title={logSentence(log)}
        lead={
          log.rows > 0
            ? `${formatNumber(log.durationS / 60, 1)} minutes, ${formatNumber(log.rateHz, log.rateHz < 5 ? 1 : 0)} readings a second, ${formatNumber(log.rows)} rows.`
            : `${log.fileName}, ${formatBytes(log.bytes)}`
        }
      />
      {log.state === 'reading' || log.state === 'received' ? (
        <div className="mt-6 max-w-[40rem]">
          <Progress
            value={log.progress}
            label={log.rows > 0 ? `Reading ${formatNumber(log.rows)} rows` : 'Waiting for a worker'}
          />
        </div>
      ) : null}
      {log.trouble ? <Banner title={log.trouble}>The file as it came is kept.</Banner> : null}
      {log.health.length > 0 ? (
        <Entry
          title="Health"
          note={`${log.health.filter(({ state }) => state === 'dead').length} dead, ${log.health.filter(({ state }) => state === 'caution').length} with a caution`}
          aside={
            dead.length > 0 ? (
              <Note icon="caution" kind="caution" head="Mend this before the next drive">
                {dead.map(({ channel, remark }) => (
                  <p key={channel}>
                    {channelWords[channel]}: {remark}
                  </p>
                ))}
              </Note>
            ) : null
          }
        >
          <Ledger
            caption="Health of each channel"
            head={['State', 'Channel', 'Unit', 'Lowest', 'Median', 'Highest', 'What was seen']}
            numeric={[3, 4, 5]}
            stack
          >
            {log.health.map((each) => (
              <tr key={each.channel}>
                <td>
                  <Status state={healthWord[each.state]} />
                </td>
                <th scope="row">{channelWords[each.channel]}</th>
                <td>{each.state === 'absent' ? '' : each.unit}</td>
                <td className="num">{digits(each.lowest)}</td>
                <td className="num">{digits(each.median)}</td>
                <td className="num">{digits(each.highest)}</td>
                <td className="wide-cell">{each.remark}</td>
              </tr>
            ))}
          </Ledger>
        </Entry>
      ) : null}
      {log.channels.includes('time') && log.state === 'ready' ? <LogLooks log={log} /> : null}
      {log.mapping.length > 0 ? (
        <Entry
          title="Columns"
          note={`${log.mapping.filter(({ channel }) => channel !== null).length} of ${log.mapping.length} used`}
        >
          <MappingForm log={log} changes={changes} mayEdit={mayEdit} />
        </Entry>
      ) : null}
      {log.faults.length > 0 ? (
        <Entry title="Left out while reading">
          <ul>
            {log.faults.map((fault) => (
              <li key={fault.kind} className="border-b border-rule py-2">
                <b>
                  {formatNumber(fault.count)} × {fault.kind}
                </b>
                {fault.examples.map((example) => (
                  <span key={example.line} className="block text-small text-ink-faint">
                    line {formatNumber(example.line)}: {example.text}
                  </span>
                ))}
              </li>
            ))}
          </ul>
        </Entry>
      ) : null}
      <Entry
        title="About this log"
        aside={
          <Note icon="info" head="The file is kept">
            <p>
              SHA-256 {log.sha256.slice(0, 8)} … {log.sha256.slice(-4)}
            </p>
          </Note>
        }
      >
        <About log={log} vehicleId={vehicleId} mayEdit={mayEdit} changes={changes} />
      </Entry>
    </Leaf>
  )
}

interface AboutProps {
  readonly log: Log
  readonly vehicleId: string
  readonly mayEdit: boolean
  readonly changes: ReturnType<typeof useLogChanges>
}

function About({ log, vehicleId, mayEdit, changes }: AboutProps) {
  const revisions = useQuery(tableQueries.list(vehicleId))
  const [asking, setAsking] = useState(false)
  const navigate = useNavigate()
  const problem = changes.change.error ?? changes.remove.error ?? changes.readAgain.error
  return (
    <div className="max-w-[40rem]">
      {mayEdit ? (
        <Select
          label="Revision in the engine when it was recorded"
          value={log.flashedRevision?.id ?? ''}
          onChange={(event) =>
            changes.change.mutate({
              version: log.version,
              flashedRevisionId: event.target.value === '' ? null : event.target.value,
            })
          }
        >
          <option value="">not said</option>
          {revisions.data?.revisions
            .filter(({ kind }) => kind === 've')
            .map((revision) => (
              <option key={revision.id} value={revision.id}>
                Revision {revision.number}
              </option>
            ))}
        </Select>
      ) : (
        <p>
          Recorded with {log.flashedRevision ? `revision ${log.flashedRevision.number}` : 'a table nobody has named'} in
          the engine.
        </p>
      )}
      {problem ? <Banner title={problem.message} /> : null}
      <div className="mt-4 flex flex-wrap items-center gap-4">
        <a className="text-copper underline underline-offset-3" href={`/api/logs/${log.id}/original`} download>
          The file as it came
        </a>
        {mayEdit ? (
          <>
            <Button disabled={changes.readAgain.isPending} onClick={() => changes.readAgain.mutate()}>
              Read it again
            </Button>
            <Button onClick={() => setAsking(true)}>Remove the log</Button>
          </>
        ) : null}
      </div>
      <Confirm
        open={asking}
        question={`Remove Log ${log.number}?`}
        consequence="The file and its channels are deleted. A log that a proposal was learned from stays."
        verb="Remove the log"
        onConfirm={() => {
          setAsking(false)
          changes.remove.mutate(undefined, { onSuccess: () => void navigate(paths.logs(vehicleId)) })
        }}
        onClose={() => setAsking(false)}
      />
    </div>
  )
}
