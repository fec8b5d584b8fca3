/** Use cases of the audit trail: reading it by pages, and taking it away as CSV. */
import { Readable } from 'node:stream'
import type { AuditEntry, AuditFilter } from '../../../shared/contract/accounts.ts'
import { textField } from '../../core/formats/table-csv.ts'
import type { Deps } from '../../deps.ts'
import { trailPage, type TrailFilter } from '../../platform/audit/read.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Actor } from '../../platform/http/actor.ts'
import type { FileAnswer } from '../../platform/http/on.ts'

const pageSize = 100

export async function listAudit(
  deps: Deps,
  actor: Actor,
  filter: TrailFilter,
): Promise<{ entries: AuditEntry[]; next: number | null }> {
  const rows = await trailPage(deps.db, actor.workshopId, filter, pageSize)
  const entries = rows.map(({ workshopId: _workshop, at, ...row }) => ({ ...row, at: at.toISOString() }))
  return { entries, next: rows.length === pageSize ? (rows.at(-1)?.id ?? null) : null }
}

const heads = ['Number', 'At', 'Who', 'Did', 'To what', 'Vehicle', 'Facts']

/** Page by page, so that a long trail never stands in memory at once. */
async function* linesOf(deps: Deps, actor: Actor, filter: AuditFilter) {
  yield `${heads.join(',')}\r\n`
  let before: number | null | undefined
  while (before !== null) {
    const page: Awaited<ReturnType<typeof listAudit>> = await listAudit(deps, actor, { ...filter, before })
    for (const { id, at, personName, action, subject, vehicleId, facts } of page.entries) {
      const texts = [at, personName, action, subject, vehicleId ?? '', JSON.stringify(facts)]
      yield `${[String(id), ...texts.map(textField)].join(',')}\r\n`
    }
    before = page.next
  }
}

export async function exportAudit(deps: Deps, actor: Actor, filter: AuditFilter): Promise<FileAnswer> {
  await deps.db.transaction((tx) =>
    recordAudit(tx, actor, { action: 'audit.export', subject: 'Audit trail', facts: { ...filter } }),
  )
  const day = deps.clock.now().toISOString().slice(0, 10)
  return {
    file: {
      name: `audit-trail-${day}.csv`,
      type: 'text/csv; charset=utf-8',
      body: Readable.from(linesOf(deps, actor, filter)),
    },
  }
}
