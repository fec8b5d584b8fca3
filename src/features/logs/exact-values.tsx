/** The shown stretch as a table of readings, for exact values; opened on request. */
import { useState } from 'react'
import type { Trace } from '../../../shared/contract/logs.ts'
import { formatNumber } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { channelWords } from './channel-words.ts'

const rowsShown = 100

const span = (low: number | null, high: number | null): string =>
  low === null || high === null ? 'none' : low === high ? String(low) : `${low} to ${high}`

export function ExactValues({ traces }: { traces: readonly Trace[] }) {
  const [open, setOpen] = useState(false)
  const time = traces[0]?.timeS ?? []
  if (time.length === 0) return null
  return (
    <div className="mt-4">
      <Button aria-expanded={open} onClick={() => setOpen(!open)}>
        {open ? 'Hide the values' : 'Show the values as a table'}
      </Button>
      {open ? (
        <>
          <p className="my-2 text-small text-ink-faint">
            {time.length > rowsShown
              ? `The first ${rowsShown} of ${formatNumber(time.length)} rows; look closer for the others.`
              : `${formatNumber(time.length)} rows.`}{' '}
            Two numbers are the lowest and highest of several readings.
          </p>
          {/* Scrolled by keyboard too, so it can be focused. */}
          <div className="max-h-96 overflow-auto" role="region" aria-label="Values" tabIndex={0}>
            <Ledger
              caption="Readings of the stretch shown"
              head={['Time, s', ...traces.map(({ channel }) => channelWords[channel])]}
              numeric={[0, ...traces.map((_, i) => i + 1)]}
            >
              {time.slice(0, rowsShown).map((t, i) => (
                <tr key={t}>
                  <th scope="row" className="num">
                    {t.toFixed(2)}
                  </th>
                  {traces.map(({ channel, low, high }) => (
                    <td key={channel} className="num">
                      {span(low[i] ?? null, high[i] ?? null)}
                    </td>
                  ))}
                </tr>
              ))}
            </Ledger>
          </div>
        </>
      ) : null}
    </div>
  )
}
