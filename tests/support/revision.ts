/** Revisions in any state, made through the API as people would, without waiting for the learner. */
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { tableToCsv } from '../../server/core/formats/table-csv.ts'
import { checklistKeys } from '../../shared/cautions.ts'
import { sendBack, signOff, submitRevision } from '../../shared/contract/reviews.ts'
import { bringTable, type Revision } from '../../shared/contract/tables.ts'
import type { RevisionState } from '../../shared/lifecycle.ts'
import type { Crew } from './server.ts'

let made = 0

/** The flatbed's table with two cells changed, never the same twice. */
export function changedCsv(): string {
  made += 1
  const values = [...flatbed.flashed].map((value, cell) =>
    cell === 5 ? 40 + made / 10 : cell === 40 ? value - 1.5 : value,
  )
  return tableToCsv({ grid: flatbed.grid, values, axes: 'rpm-across', decimal: 'point', remarks: [] })
}

export const signature = (crew: Crew, revision: Revision, note = '') => ({
  name: crew.reviewer.name,
  checksum: revision.checksum,
  note,
  checklist: [...checklistKeys],
})

/** A revision of the vehicle's fuel table, by the tuner, brought to the state. The vehicle needs a table already. */
export async function aRevision(crew: Crew, vehicleId: string, state: RevisionState = 'draft'): Promise<Revision> {
  const revision = (
    await crew.tuner.call(bringTable, {
      params: { vehicleId },
      body: { kind: 've', text: changedCsv(), origin: 'paste', note: '', inEngine: false },
    })
  ).body
  const params = { revisionId: revision.id }
  if (state === 'draft') return revision
  const submitted = (await crew.tuner.call(submitRevision, { params, body: { note: '' } })).body
  if (state === 'submitted') return submitted
  if (state === 'sent-back') return (await crew.reviewer.call(sendBack, { params, body: { note: 'Again.' } })).body
  return (await crew.reviewer.call(signOff, { params, body: signature(crew, revision) })).body
}
