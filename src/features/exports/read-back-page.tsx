/** The check after typing or loading: drop in the table read back from the controller, and see which revision it is. */
import { useMutation } from '@tanstack/react-query'
import { useState } from 'react'
import { Link, useParams } from 'react-router-dom'
import { checkReadBack, type ReadBack } from '../../../shared/contract/exports.ts'
import { call } from '../../lib/api.ts'
import { formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { TextArea } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Note } from '../../ui/note.tsx'

/** The conclusion, once there is one. */
export function readBackSentence(result: ReadBack | undefined): string {
  if (!result) return 'Is what the controller holds what was signed?'
  if (result.matches) return `It is revision ${result.matches.number}, cell for cell`
  if (result.closest) {
    const count = result.closest.differ.length
    return `${formatNumber(count)} ${count === 1 ? 'cell differs' : 'cells differ'} from revision ${result.closest.number}`
  }
  return 'It matches no revision of this vehicle'
}

export default function ReadBackPage() {
  const { vehicleId = '' } = useParams()
  const [text, setText] = useState('')
  const check = useMutation({
    mutationFn: () => call(checkReadBack, { params: { vehicleId }, body: { text, kind: 've' } }),
  })
  usePageTitle('Check a read-back')
  const result = check.data
  return (
    <Leaf>
      <PageHead
        folio="Check a read-back"
        title={readBackSentence(result)}
        lead={result?.detail ?? 'Paste the table read back from the controller, or choose its file.'}
      />
      <Entry
        title="The table"
        aside={
          <Note icon="info" head="Nothing is stored">
            <p>
              The table is only compared. Axes in the first row and column, as the export writes them; either way round.
            </p>
          </Note>
        }
      >
        <form
          onSubmit={(event) => {
            event.preventDefault()
            check.mutate()
          }}
        >
          <TextArea
            label="Cells"
            rows={10}
            value={text}
            onChange={(event) => setText(event.target.value)}
            hint="As copied from a spreadsheet, or as CSV"
          />
          <label className="mt-3 block">
            <span className="font-semibold">Or a file</span>
            <input
              type="file"
              accept=".csv,.txt,text/csv,text/plain"
              className="mt-1 block"
              onChange={(event) => {
                const file = event.target.files?.[0]
                if (file) void file.text().then(setText)
              }}
            />
          </label>
          {check.isError ? <Banner title={check.error.message}>What you pasted is kept.</Banner> : null}
          <Button className="mt-4" variant="solid" type="submit" disabled={text.trim() === '' || check.isPending}>
            Compare
          </Button>
        </form>
      </Entry>
      {result?.closest && result.closest.differ.length > 0 ? (
        <Entry title="What differs" note={`against revision ${result.closest.number}`}>
          <ul className="columns-2 gap-8">
            {result.closest.differ.slice(0, 60).map((cell) => (
              <li key={cell.cell}>
                cell {cell.cell + 1}: {formatNumber(cell.expected, 2)} expected, <b>{formatNumber(cell.found, 2)}</b>{' '}
                found
              </li>
            ))}
          </ul>
          <p className="mt-3">
            <Link
              className="text-copper underline underline-offset-3"
              to={paths.revision(vehicleId, result.closest.id)}
            >
              Open revision {result.closest.number}
            </Link>
          </p>
        </Entry>
      ) : null}
    </Leaf>
  )
}
