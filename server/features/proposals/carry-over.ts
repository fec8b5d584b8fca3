/** Two proposals from one revision: the second is told what the first has moved, and is carried over cell by cell. */
import type { Moved, MovedCell } from '../../../shared/contract/proposals.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { sameGrid } from '../../../shared/grid.ts'
import { fromWire } from '../../../shared/wire.ts'
import type { Deps } from '../../deps.ts'
import type { Reader } from '../../platform/db/client.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { getRevision } from '../tables/service.ts'
import { lockVehicle } from '../vehicles/service.ts'
import { openProposal, reviseFrom, takenTable } from './service.ts'
import * as store from './store.ts'

interface Situation {
  readonly found: store.ProposalFound
  readonly surface: NonNullable<store.ProposalRow['surface']>
  readonly onto: Revision | null
}

async function situationOf(db: Reader, actor: Actor, proposalId: string): Promise<Situation> {
  const found = await openProposal(db, actor, proposalId)
  const { surface } = found.row
  if (!surface) throw new Problem('proposal-not-open')
  const newer = await store.newerRevision(db, found.row, found.baseNumber)
  return { found, surface, onto: newer ? await getRevision(db, scopeOf(actor), newer.id) : null }
}

/** Every cell that either side has changed, with the three values. */
function movedCells({ found, surface, onto }: Situation): MovedCell[] {
  if (!onto) return []
  const { rpm, mapKpa } = surface.grid
  const mine = takenTable(found.row, surface)
  return fromWire(onto.values).reduce<MovedCell[]>((cells, theirs, cell) => {
    const base = surface.current[cell]!
    if (theirs !== base || mine[cell] !== base) {
      const place = { rpm: rpm[cell % rpm.length]!, mapKpa: mapKpa[Math.floor(cell / rpm.length)]! }
      cells.push({ cell, ...place, base, theirs, mine: mine[cell]! })
    }
    return cells
  }, [])
}

const isContested = ({ base, theirs, mine }: MovedCell): boolean => theirs !== base && mine !== base && mine !== theirs
const isMineOnly = ({ base, theirs, mine }: MovedCell): boolean => theirs === base && mine !== base

export async function getMoved(db: Reader, actor: Actor, proposalId: string): Promise<Moved> {
  const situation = await situationOf(db, actor, proposalId)
  const { found, surface, onto } = situation
  const sameAxes = onto === null || sameGrid(onto.grid, surface.grid)
  const cells = sameAxes ? movedCells(situation) : []
  return {
    version: found.row.version,
    base: { id: found.row.baseRevisionId, number: found.baseNumber },
    onto: onto && { id: onto.id, number: onto.number, author: onto.author.name, state: onto.state },
    sameAxes,
    contested: cells.filter(isContested),
    theirsOnly: cells.filter((each) => !isContested(each) && !isMineOnly(each)),
    mineOnly: cells.filter(isMineOnly),
  }
}

interface CarryOver {
  readonly version: number
  readonly ontoId: string
  readonly answers: readonly { readonly cell: number; readonly take: 'mine' | 'theirs' }[]
  readonly note: string
}

/** @throws Problem where a still later revision exists, the axes differ, or a contested cell has no answer. */
function mustBeCarriable({ onto, surface }: Situation, ontoId: string): Revision {
  if (!onto)
    throw new Problem('move-not-legal', { detail: 'No later revision has been made: make the revision as usual.' })
  if (onto.id !== ontoId)
    throw new Problem('changed-meanwhile', {
      detail: `Revision ${onto.number} has been made since you looked. Load the page again to see what it moved.`,
    })
  if (!sameGrid(onto.grid, surface.grid))
    throw new Problem('move-not-legal', {
      detail: `Revision ${onto.number} has other axes. Learn again from it; what the logs taught is kept.`,
    })
  return onto
}

export async function carryOver(deps: Deps, actor: Actor, proposalId: string, input: CarryOver): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const seen = await situationOf(tx, actor, proposalId)
    // Whoever makes a revision holds the vehicle's row, so that none can appear between this look and the writing.
    await lockVehicle(tx, seen.found.row.vehicleId)
    const situation = await situationOf(tx, actor, proposalId)
    const onto = mustBeCarriable(situation, input.ontoId)
    const { row } = situation.found
    const taken = new Map(input.answers.map(({ cell, take }) => [cell, take]))
    const moved = movedCells(situation)
    const open = moved.filter((each) => isContested(each) && !taken.has(each.cell))
    if (open[0])
      throw new Problem('input-invalid', {
        detail: `${open.length} contested cells have no answer, the first at ${open[0].rpm} rpm and ${open[0].mapKpa} kPa.`,
      })
    const mine = new Set(
      moved
        .filter((each) => isMineOnly(each) || (isContested(each) && taken.get(each.cell) === 'mine'))
        .map(({ cell }) => cell),
    )
    const theirs = fromWire(onto.values)
    const own = takenTable(row, situation.surface)
    return reviseFrom(tx, actor, row, situation.surface, {
      version: input.version,
      note: input.note,
      values: theirs.map((value, cell) => (mine.has(cell) ? own[cell]! : value)),
      parent: { id: onto.id, values: theirs },
      own: (cell) => mine.has(cell),
      settings: { ...row.settings, carriedOnto: onto.checksum },
    })
  })
}
