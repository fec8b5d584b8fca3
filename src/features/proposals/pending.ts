/** Decisions that the server has not confirmed, kept on this device so that a closed tab loses nothing. */
import { z } from 'zod'
import { cellDecisions } from '../../../shared/lifecycle.ts'
import type { CellChange } from './decisions.ts'

const Change = z.object({
  cell: z.number().int().min(0),
  decision: z.enum(cellDecisions),
  value: z.number().optional(),
})
const Pending = z.object({
  /** The version of the proposal the first step was made on. */
  version: z.number().int(),
  steps: z.array(z.array(Change)),
})

export interface Pending {
  readonly version: number
  readonly steps: readonly (readonly CellChange[])[]
}

const keyOf = (personId: string, proposalId: string) => `evenburn.pending.${personId}.${proposalId}`

/** What was left on this device; null for nothing, or for what cannot be read. */
export function readPending(personId: string, proposalId: string): Pending | null {
  try {
    const found = Pending.safeParse(JSON.parse(localStorage.getItem(keyOf(personId, proposalId)) ?? 'null'))
    return found.success && found.data.steps.length > 0 ? (found.data as Pending) : null
  } catch {
    return null
  }
}

export function writePending(personId: string, proposalId: string, pending: Pending): void {
  const key = keyOf(personId, proposalId)
  try {
    if (pending.steps.length === 0) localStorage.removeItem(key)
    else localStorage.setItem(key, JSON.stringify(pending))
  } catch {
    // Storage is full or forbidden: the page still sends what it holds, only a closed tab would lose it.
  }
}
