/** What each column is: as recognised, to be corrected; the log is then read again from the kept original. */
import { useState } from 'react'
import { channelNames, type ChannelName, type Log } from '../../../shared/contract/logs.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { channelWords } from './channel-words.ts'
import type { useLogChanges } from './queries.ts'

interface MappingFormProps {
  readonly log: Log
  readonly changes: ReturnType<typeof useLogChanges>
  readonly mayEdit: boolean
}

const box = 'h-8 rounded-cut border border-rule-strong bg-sheet px-2'

export function MappingForm({ log, changes, mayEdit }: MappingFormProps) {
  const [columns, setColumns] = useState(() =>
    log.mapping.map(({ index, channel, unit }) => ({ index, channel, unit })),
  )
  const set = (index: number, patch: { channel?: ChannelName | null; unit?: string }) =>
    setColumns((list) => list.map((column) => (column.index === index ? { ...column, ...patch } : column)))
  return (
    <form
      onSubmit={(event) => {
        event.preventDefault()
        changes.map.mutate(columns)
      }}
    >
      <Ledger caption="Columns of the file" head={['Column', 'Channel', 'Unit', 'Why']} stack>
        {log.mapping.map((column) => {
          const now = columns.find((each) => each.index === column.index)
          return (
            <tr key={column.index}>
              <th scope="row">{column.header || `column ${column.index + 1}`}</th>
              <td>
                {mayEdit ? (
                  <select
                    aria-label={`Channel of ${column.header}`}
                    className={box}
                    value={now?.channel ?? ''}
                    onChange={(event) =>
                      set(column.index, {
                        channel: event.target.value === '' ? null : (event.target.value as ChannelName),
                      })
                    }
                  >
                    <option value="">unused</option>
                    {channelNames.map((name) => (
                      <option key={name} value={name}>
                        {channelWords[name]}
                      </option>
                    ))}
                  </select>
                ) : column.channel ? (
                  channelWords[column.channel]
                ) : (
                  'unused'
                )}
              </td>
              <td>
                {mayEdit ? (
                  <input
                    aria-label={`Unit of ${column.header}`}
                    className={`${box} w-20`}
                    maxLength={20}
                    value={now?.unit ?? ''}
                    onChange={(event) => set(column.index, { unit: event.target.value })}
                  />
                ) : (
                  column.unit
                )}
              </td>
              <td className="wide-cell text-ink-quiet">{column.reason}</td>
            </tr>
          )
        })}
      </Ledger>
      {changes.map.isError ? (
        <Banner title={changes.map.error.message}>Your choice is kept on this page.</Banner>
      ) : null}
      {mayEdit ? (
        <Button className="mt-4" type="submit" disabled={changes.map.isPending}>
          Read the log with these columns
        </Button>
      ) : null}
    </form>
  )
}
