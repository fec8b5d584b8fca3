/** The files a revision leaves as; a draft is named a draft before it is taken. */
import { useState } from 'react'
import type { Revision } from '../../../shared/contract/tables.ts'
import { Note } from '../../ui/note.tsx'
import { Select } from '../../ui/field.tsx'

export function ExportLinks({ revision }: { revision: Revision }) {
  const [axes, setAxes] = useState('rpm-across')
  const [decimal, setDecimal] = useState('point')
  const link = 'text-copper underline underline-offset-3'
  return (
    <>
      {revision.state === 'signed' ? null : (
        <div className="mb-4 max-w-(--measure)">
          <Note icon="caution" kind="caution" head="Draft, not signed">
            <p>The file says so inside and in its name. Nobody has answered for these numbers.</p>
          </Note>
        </div>
      )}
      <div className="flex flex-wrap items-end gap-4">
        <Select label="Axes" value={axes} onChange={(event) => setAxes(event.target.value)}>
          <option value="rpm-across">rpm across, kPa down</option>
          <option value="rpm-down">kPa across, rpm down</option>
        </Select>
        <Select label="Decimal mark" value={decimal} onChange={(event) => setDecimal(event.target.value)}>
          <option value="point">point</option>
          <option value="comma">comma, fields parted by semicolon</option>
        </Select>
      </div>
      <ul className="mt-4 flex flex-wrap gap-x-6 gap-y-2">
        <li>
          <a className={link} href={`/api/revisions/${revision.id}/table.csv?axes=${axes}&decimal=${decimal}`} download>
            Table as CSV{revision.state === 'signed' ? '' : ', draft'}
          </a>
        </li>
        <li>
          <a className={link} href={`/api/revisions/${revision.id}/revision.json`} download>
            Everything behind it as JSON
          </a>
        </li>
      </ul>
    </>
  )
}
