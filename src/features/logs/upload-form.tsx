/** Uploading logs: drop or choose files, say which revision was in the engine; each shows how far it is and can be stopped. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { formatBytes } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'
import { Select } from '../../ui/field.tsx'
import { Progress } from '../../ui/progress.tsx'
import { tableQueries } from '../tables/queries.ts'
import { useUploadLog } from './queries.ts'

interface Sending {
  readonly key: string
  readonly file: File
  readonly share: number
  readonly state: 'sending' | 'done' | 'failed'
  readonly words: string
  readonly stop: AbortController
}

export function UploadForm({ vehicleId, inEngineId }: { vehicleId: string; inEngineId: string | null }) {
  const revisions = useQuery(tableQueries.list(vehicleId))
  const [revisionId, setRevisionId] = useState(inEngineId ?? '')
  const [sending, setSending] = useState<readonly Sending[]>([])
  const [over, setOver] = useState(false)
  const upload = useUploadLog(vehicleId)
  const change = (key: string, patch: Partial<Sending>) =>
    setSending((list) => list.map((each) => (each.key === key ? { ...each, ...patch } : each)))

  const send = async (file: File) => {
    const key = `${file.name}-${file.size}-${Math.random()}`
    const stop = new AbortController()
    setSending((list) => [...list, { key, file, share: 0, state: 'sending', words: '', stop }])
    try {
      await upload.mutateAsync({
        file,
        title: '',
        ...(revisionId ? { flashedRevisionId: revisionId } : {}),
        onProgress: (share) => change(key, { share }),
        signal: stop.signal,
      })
      change(key, { state: 'done', share: 1, words: 'It is here; the worker reads it.' })
    } catch (error) {
      change(key, {
        state: 'failed',
        words: stop.signal.aborted
          ? 'Stopped. Nothing of it was kept.'
          : error instanceof Error
            ? error.message
            : 'It did not arrive.',
      })
    }
  }
  const sendAll = (files: FileList | null) => {
    for (const file of files ?? []) void send(file)
  }
  const fuelTables = revisions.data?.revisions.filter((revision) => revision.kind === 've') ?? []
  return (
    <div>
      <div className="mb-4 max-w-[26rem]">
        <Select
          label="Revision in the engine when it was recorded"
          hint="The learner compares the readings with that table"
          value={revisionId}
          onChange={(event) => setRevisionId(event.target.value)}
        >
          <option value="">As marked now</option>
          {fuelTables.map((revision) => (
            <option key={revision.id} value={revision.id}>
              Revision {revision.number}
              {revision.flashed ? ', in the engine' : ''}
            </option>
          ))}
        </Select>
      </div>
      <label
        onDragOver={(event) => {
          event.preventDefault()
          setOver(true)
        }}
        onDragLeave={() => setOver(false)}
        onDrop={(event) => {
          event.preventDefault()
          setOver(false)
          sendAll(event.dataTransfer.files)
        }}
        className={`block rounded-cut border border-dashed p-6 ${over ? 'border-copper bg-copper-wash' : 'border-rule-strong'}`}
      >
        <span className="block font-semibold">Drop logs here, or choose them</span>
        <span className="block text-small text-ink-faint">
          CSV with a header, any column names. Several at once are fine.
        </span>
        <input
          type="file"
          multiple
          accept=".csv,.txt,.tsv,.log,text/csv,text/plain"
          className="mt-3 block w-full"
          onChange={(event) => {
            sendAll(event.target.files)
            event.target.value = ''
          }}
        />
      </label>
      <ul aria-live="polite" className="mt-3">
        {sending.map((each) => (
          <li key={each.key} className="border-b border-rule py-3">
            {each.state === 'sending' ? (
              <div className="flex items-end gap-4">
                <div className="grow">
                  <Progress
                    value={each.share}
                    label={`${each.file.name}, ${formatBytes(each.file.size)}: ${Math.round(100 * each.share)} % sent`}
                  />
                </div>
                <Button onClick={() => each.stop.abort()}>Stop</Button>
              </div>
            ) : (
              <div className="flex flex-wrap items-center gap-4">
                <span className="grow">
                  <b>{each.file.name}</b>: {each.words}
                </span>
                {each.state === 'failed' ? (
                  <Button
                    onClick={() => {
                      setSending((list) => list.filter(({ key }) => key !== each.key))
                      void send(each.file)
                    }}
                  >
                    Send it again
                  </Button>
                ) : null}
              </div>
            )}
          </li>
        ))}
      </ul>
    </div>
  )
}
