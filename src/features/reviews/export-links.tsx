/** The files a revision leaves as; a draft is named a draft before it is taken. */
import { useMutation } from '@tanstack/react-query'
import { useState } from 'react'
import { exportCells, type TableForm } from '../../../shared/contract/exports.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { call } from '../../lib/api.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Select } from '../../ui/field.tsx'
import { Note } from '../../ui/note.tsx'

type Choice = Partial<TableForm>

/** Asked for from the server with the same choices as the file, then laid on the clipboard. */
function useCopyCells(revisionId: string) {
  return useMutation({
    mutationFn: async (form: Choice) => {
      const { text } = await call(exportCells, { params: { revisionId }, query: form })
      await navigator.clipboard.writeText(text)
    },
  })
}

const addressOf = (revisionId: string, form: Choice): string =>
  `/api/revisions/${revisionId}/table.csv?${new URLSearchParams(
    Object.entries(form).map(([name, value]) => [name, String(value)]),
  )}`

export function ExportLinks({ revision }: { revision: Revision }) {
  const [form, setForm] = useState<Choice>({ axes: 'rpm-across', decimal: 'point', map: 'kPa' })
  const copy = useCopyCells(revision.id)
  const draft = revision.state === 'signed' ? '' : ', draft'
  const link = 'flex min-h-6 items-center text-copper underline underline-offset-3'
  return (
    <>
      {draft ? (
        <div className="mb-4 max-w-(--measure)">
          <Note icon="caution" kind="caution" head="Draft, not signed">
            <p>Every file says so inside and in its name, the change sheet on each page. Nobody has answered for it.</p>
          </Note>
        </div>
      ) : null}
      <ul className="mb-5 flex flex-wrap gap-x-6 gap-y-2">
        <li>
          <a className={link} href={`/api/revisions/${revision.id}/change-sheet.pdf`} download>
            Change sheet to print, PDF{draft}
          </a>
        </li>
        <li>
          <a className={link} href={`/api/revisions/${revision.id}/revision.json`} download>
            Everything behind it, JSON{draft}
          </a>
        </li>
      </ul>
      <Choices form={form} onChange={setForm} kind={revision.kind} />
      <div className="mt-4 flex flex-wrap items-center gap-x-6 gap-y-2">
        <a className={link} href={addressOf(revision.id, form)} download>
          Table as CSV{draft}
        </a>
        <Button disabled={copy.isPending} onClick={() => copy.mutate(form)}>
          Copy the cells for a spreadsheet
        </Button>
        <span role="status" className="text-ink-quiet">
          {copy.isSuccess ? 'Copied; the first line says which revision it is.' : ''}
        </span>
      </div>
      {copy.isError ? <Banner title="The cells could not be copied">{copy.error.message}</Banner> : null}
    </>
  )
}

interface ChoicesProps {
  readonly form: Choice
  readonly onChange: (form: Choice) => void
  readonly kind: Revision['kind']
}

function Choices({ form, onChange, kind }: ChoicesProps) {
  const { places: _all, ...whole } = form
  return (
    <fieldset className="grid max-w-[44rem] grid-cols-2 gap-4 sm:grid-cols-3">
      <legend className="mb-2 font-semibold">How the table is written</legend>
      <Select
        label="Axes"
        value={form.axes}
        onChange={(event) => onChange({ ...form, axes: event.target.value as TableForm['axes'] })}
      >
        <option value="rpm-across">rpm across, MAP down</option>
        <option value="rpm-down">MAP across, rpm down</option>
      </Select>
      <Select
        label="Decimal mark"
        value={form.decimal}
        onChange={(event) => onChange({ ...form, decimal: event.target.value as TableForm['decimal'] })}
      >
        <option value="point">point</option>
        <option value="comma">comma</option>
      </Select>
      <Select
        label="Decimal places"
        value={form.places ?? 'all'}
        onChange={({ target }) => onChange(target.value === 'all' ? whole : { ...form, places: Number(target.value) })}
      >
        <option value="all">as stored</option>
        {[0, 1, 2, 3].map((places) => (
          <option key={places} value={places}>
            {places}
          </option>
        ))}
      </Select>
      <Select
        label="MAP in"
        value={form.map}
        onChange={(event) => onChange({ ...form, map: event.target.value as TableForm['map'] })}
      >
        <option value="kPa">kPa absolute</option>
        <option value="bar">bar absolute</option>
        <option value="psi">psi absolute</option>
      </Select>
      {kind === 'target' ? (
        <Select
          label="Targets as"
          value={form.target ?? 'lambda'}
          onChange={(event) => onChange({ ...form, target: event.target.value as TableForm['target'] })}
        >
          <option value="lambda">lambda</option>
          <option value="afr">AFR</option>
        </Select>
      ) : null}
    </fieldset>
  )
}
