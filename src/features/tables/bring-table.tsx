/** Bringing a table: paste or file, read at once, faults named by row and column, shown before it is stored. */
import { useState } from 'react'
import type { TableKind } from '../../../shared/contract/tables.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Checkbox, Field, TextArea } from '../../ui/field.tsx'
import { Note } from '../../ui/note.tsx'
import { useBringTable, usePreviewTable } from './queries.ts'
import { TableMap } from './table-map.tsx'

interface BringTableProps {
  readonly vehicleId: string
  readonly kind: TableKind
  readonly first: boolean
  readonly onClose: () => void
}

const words: Record<TableKind, string> = { ve: 'fuel table', target: 'target table' }

export function BringTable({ vehicleId, kind, first, onClose }: BringTableProps) {
  const [text, setText] = useState('')
  const [origin, setOrigin] = useState<'upload' | 'paste'>('paste')
  const [note, setNote] = useState('')
  const [inEngine, setInEngine] = useState(first && kind === 've')
  const preview = usePreviewTable(vehicleId)
  const bring = useBringTable(vehicleId)
  const read = (next: string, from: 'upload' | 'paste') => {
    setText(next)
    setOrigin(from)
    preview.reset()
    if (next.trim() !== '') preview.mutate({ kind, text: next })
  }
  const seen = preview.data
  return (
    <form
      aria-label={`Bring a ${words[kind]}`}
      className="mt-5 border-t-2 border-b border-ink py-4"
      onSubmit={(event) => {
        event.preventDefault()
        bring.mutate({ kind, text, origin, note, inEngine }, { onSuccess: onClose })
      }}
    >
      <TextArea
        label={`Paste the ${words[kind]}`}
        hint="From a spreadsheet or a CSV file: breakpoints in the first row and the first column, either way round; decimal point or comma."
        rows={8}
        value={text}
        onChange={(event) => read(event.target.value, 'paste')}
      />
      <label className="mt-3 block">
        <span className="font-semibold">Or choose its file</span>
        <input
          type="file"
          accept=".csv,.txt,.tsv,text/csv,text/plain"
          className="mt-1 block"
          onChange={(event) => {
            const file = event.target.files?.[0]
            if (file) void file.text().then((content) => read(content, 'upload'))
          }}
        />
      </label>
      <div aria-live="polite">
        {preview.isError ? <Banner title={preview.error.message}>What you pasted is kept.</Banner> : null}
        {seen && !seen.ok ? (
          <Banner
            title={
              seen.problems.length === 1
                ? 'One thing must be mended first'
                : `${seen.problems.length} things must be mended first`
            }
          >
            <ul>
              {seen.problems.slice(0, 8).map((problem) => (
                <li key={`${problem.row}-${problem.col}-${problem.detail}`}>
                  {problem.row === null
                    ? ''
                    : `Row ${problem.row}${problem.col === null ? '' : `, column ${problem.col}`}: `}
                  {problem.detail}
                </li>
              ))}
            </ul>
          </Banner>
        ) : null}
        {seen?.ok ? (
          <div className="mt-5">
            <p className="mb-2">
              {seen.grid.rpm.length} by {seen.grid.mapKpa.length} cells, {seen.grid.rpm[0]} to {seen.grid.rpm.at(-1)}{' '}
              rpm, {seen.grid.mapKpa[0]} to {seen.grid.mapKpa.at(-1)} kPa. {seen.notes.join(' ')}
            </p>
            <TableMap kind={kind} grid={seen.grid} values={seen.values} label={`The ${words[kind]} as it was read`} />
          </div>
        ) : null}
      </div>
      <div className="mt-5 grid max-w-[40rem] gap-4">
        <Field
          label="Note"
          hint="Where it comes from"
          maxLength={500}
          value={note}
          onChange={(event) => setNote(event.target.value)}
        />
        {kind === 've' ? (
          <Checkbox
            label="This is what the controller holds at the moment"
            checked={inEngine}
            onChange={(event) => setInEngine(event.target.checked)}
          />
        ) : null}
        {kind === 'target' ? (
          <Note icon="caution" kind="caution" head="Targets decide how lean the engine runs">
            <p>
              Lean mixture under load melts pistons. Targets above lambda 0.90 at full load want a reason (common
              practice, no source).
            </p>
          </Note>
        ) : null}
      </div>
      {bring.isError ? <Banner title={bring.error.message}>What you pasted is kept.</Banner> : null}
      <div className="mt-4 flex gap-3">
        <Button variant="solid" type="submit" disabled={!seen?.ok || bring.isPending}>
          Store the {words[kind]}
        </Button>
        {first ? null : <Button onClick={onClose}>Leave it</Button>}
      </div>
    </form>
  )
}
