/** One line in the audit trail for every change of state, in the same transaction as the change. */
import type { Tx } from '../db/client.ts'
import { auditEntries } from '../db/schema/audit.ts'

export interface AuditBy {
  readonly personId: string | null
  readonly name: string
  readonly workshopId: string
}

export interface AuditFact {
  /** `noun.verb`, past or imperative: `revision.sign-off`. */
  readonly action: string
  /** What it was done to, in words a person reads. */
  readonly subject: string
  readonly vehicleId?: string
  readonly facts?: Record<string, unknown>
}

export async function recordAudit(tx: Tx, by: AuditBy, fact: AuditFact): Promise<void> {
  await tx.insert(auditEntries).values({
    workshopId: by.workshopId,
    personId: by.personId,
    personName: by.name,
    action: fact.action,
    subject: fact.subject,
    vehicleId: fact.vehicleId ?? null,
    facts: fact.facts ?? {},
  })
}
