/** The engine sheet: what the engine is, and what follows from it, with the sums shown. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams } from 'react-router-dom'
import type { Vehicle } from '../../../shared/contract/vehicles.ts'
import { formatLongDate, formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Figures } from '../../ui/facts.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { useWriteEngineSheet, vehicleQueries } from './queries.ts'
import { draftOf, emptySheet } from './sheet-form.ts'
import { SheetFields } from './sheet-fields.tsx'
import { dutyLimitPct, sumsOf } from './sums.ts'
import { useSheetDraft } from './use-sheet-draft.ts'

export default function EngineSheetPage() {
  const { vehicleId = '' } = useParams()
  const vehicle = useQuery(vehicleQueries.detail(vehicleId))
  usePageTitle('Engine sheet')
  if (vehicle.isPending) return <Loading what="Fetching the engine sheet" />
  if (vehicle.isError) return <Banner title={vehicle.error.message}>Load the page again.</Banner>
  return <Sheet key={vehicle.data.sheet?.id ?? 'none'} vehicle={vehicle.data} />
}

function Sheet({ vehicle }: { vehicle: Vehicle }) {
  const { sheet } = vehicle
  const mayEdit = useCan('vehicle:edit')
  const [editing, setEditing] = useState(sheet === null && mayEdit)
  const sums = sheet ? sumsOf(sheet) : []
  const duty = sums.at(-1)?.value ?? 0
  const title = !sheet
    ? 'The engine sheet is not written yet'
    : duty <= dutyLimitPct
      ? `The injectors are large enough: open for ${formatNumber(duty)} % of the time at the rev limit`
      : `The injectors are too small: they would be open for ${formatNumber(duty)} % of the time at the rev limit`
  return (
    <Leaf>
      <PageHead
        folio={
          sheet
            ? `Engine sheet, writing ${sheet.number}, by ${sheet.author}, ${formatLongDate(sheet.createdAt)}`
            : 'Engine sheet'
        }
        title={title}
        lead={
          sheet
            ? 'Everything computed from this sheet is shown with its sum.'
            : 'Learning needs displacement, rev limit and the range of the wideband.'
        }
        actions={mayEdit && !editing ? <Button onClick={() => setEditing(true)}>Write it anew</Button> : null}
      />
      {editing ? (
        <Edit vehicle={vehicle} onDone={() => setEditing(false)} />
      ) : sheet ? (
        <>
          <Entry>
            <Figures
              items={[
                { label: 'stoichiometric ratio', value: formatNumber(sheet.stoichAfr, 2) },
                { label: 'base pulse width', value: formatNumber(sums[4]!.value, 2), unit: 'ms' },
                { label: 'duty at the rev limit', value: formatNumber(duty), unit: '%' },
              ]}
            />
          </Entry>
          <Entry
            title="Sums"
            aside={
              <>
                <Note icon="info" head="Where the sums come from">
                  <p>The ideal gas law for the air, the fuel’s stoichiometric ratio, and the injector’s flow.</p>
                </Note>
                <Note icon="reason" head="What a change here does">
                  <p>Logs keep the sheet they were taken with. Evidence is kept: the engine did not change.</p>
                </Note>
              </>
            }
          >
            <Ledger caption="What follows from the sheet" head={['What', 'Sum', 'Result']} numeric={[2]} stack>
              {sums.map((sum) => (
                <tr key={sum.name}>
                  <th scope="row">{sum.name}</th>
                  <td>{sum.sum}</td>
                  <td className="num">
                    <b>{formatNumber(sum.value, sum.digits)}</b> <span className="text-ink-faint">{sum.unit}</span>
                  </td>
                </tr>
              ))}
            </Ledger>
          </Entry>
        </>
      ) : null}
    </Leaf>
  )
}

function Edit({ vehicle, onDone }: { vehicle: Vehicle; onDone: () => void }) {
  const form = useSheetDraft(vehicle.sheet ? draftOf(vehicle.sheet) : emptySheet)
  const write = useWriteEngineSheet(vehicle.id)
  return (
    <Entry title="Engine">
      <form
        onSubmit={(event) => {
          event.preventDefault()
          const sheet = form.read()
          if (sheet) write.mutate(sheet, { onSuccess: onDone })
        }}
      >
        <SheetFields draft={form.draft} errors={form.errors} onChange={form.setDraft} />
        {write.isError ? <Banner title={write.error.message}>What you typed is kept.</Banner> : null}
        <div className="mt-6 flex gap-3">
          <Button variant="solid" type="submit" disabled={write.isPending}>
            Write the sheet
          </Button>
          {vehicle.sheet ? <Button onClick={onDone}>Leave it as it was</Button> : null}
        </div>
      </form>
    </Entry>
  )
}
