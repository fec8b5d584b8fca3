/** Who acts, in which workshop, and which rows they may see. */
import { seesWholeWorkshop, type Role } from '../../../shared/access.ts'

export interface Actor {
  readonly personId: string
  readonly name: string
  readonly email: string
  readonly workshopId: string
  readonly roles: readonly Role[]
  /** Null when an access token speaks. */
  readonly sessionId: string | null
}

/** Which rows: the workshop's, and for owners only the vehicles they are on. Every store read takes one. */
export interface Scope {
  readonly workshopId: string
  readonly ownerId: string | null
}

export const scopeOf = (actor: Actor): Scope => ({
  workshopId: actor.workshopId,
  ownerId: seesWholeWorkshop(actor.roles) ? null : actor.personId,
})
