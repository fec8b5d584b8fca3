/** Adding a vehicle: its name, and the engine sheet that the maths needs. */
import { useState } from 'react'
import { useNavigate } from 'react-router-dom'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Field, TextArea } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Note } from '../../ui/note.tsx'
import { useCreateVehicle } from './queries.ts'
import { emptySheet } from './sheet-form.ts'
import { SheetFields } from './sheet-fields.tsx'
import { useSheetDraft } from './use-sheet-draft.ts'

export default function NewVehiclePage() {
  usePageTitle('Add a vehicle')
  const [name, setName] = useState('')
  const [description, setDescription] = useState('')
  const sheet = useSheetDraft(emptySheet)
  const create = useCreateVehicle()
  const navigate = useNavigate()
  const submit = async () => {
    const read = sheet.read()
    if (!read || name.trim() === '') return
    const vehicle = await create.mutateAsync({ name, description, sheet: read })
    await navigate(paths.tables(vehicle.id))
  }
  return (
    <Leaf>
      <PageHead
        folio="Add a vehicle"
        title="Describe the engine, then bring its table"
        lead="These are the numbers that the maths needs. The papers and the injectors’ data sheet have them."
      />
      <form
        onSubmit={(event) => {
          event.preventDefault()
          void submit().catch(() => undefined)
        }}
      >
        <Entry title="Vehicle">
          <div className="grid max-w-[40rem] gap-4">
            <Field
              label="Name"
              hint="As the workshop calls it"
              required
              maxLength={80}
              value={name}
              onChange={(event) => setName(event.target.value)}
            />
            <TextArea
              label="Description"
              hint="Engine, year, what is wrong with it"
              rows={2}
              maxLength={400}
              value={description}
              onChange={(event) => setDescription(event.target.value)}
            />
          </div>
        </Entry>
        <Entry
          title="Engine"
          aside={
            <Note icon="info" head="A wrong number here">
              <p>
                Displacement or injector flow that is off by a tenth shows as a correction of every cell by a tenth. It
                can be put right later.
              </p>
            </Note>
          }
        >
          <SheetFields draft={sheet.draft} errors={sheet.errors} onChange={sheet.setDraft} />
          {create.isError ? <Banner title={create.error.message}>What you typed is kept.</Banner> : null}
          <Button className="mt-6" variant="solid" type="submit" disabled={create.isPending}>
            Add the vehicle
          </Button>
        </Entry>
      </form>
    </Leaf>
  )
}
