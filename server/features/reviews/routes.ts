/** Binds the reviews endpoints; no logic. */
import * as contract from '../../../shared/contract/reviews.ts'
import type { Deps } from '../../deps.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import * as comments from './comments.ts'
import * as history from './history.ts'
import * as reviews from './service.ts'

export function mountReviews(binder: Binder, deps: Deps): void {
  on(binder, contract.getReview)(({ actor, params }) => reviews.getReview(deps, actor, params.revisionId))
  on(
    binder,
    contract.submitRevision,
  )(({ actor, params, body }) => reviews.submit(deps, actor, params.revisionId, body.note))
  on(binder, contract.withdrawRevision)(({ actor, params }) => reviews.withdraw(deps, actor, params.revisionId))
  on(binder, contract.signOff)(({ actor, params, body }) => reviews.signOff(deps, actor, params.revisionId, body))
  on(
    binder,
    contract.sendBack,
  )(({ actor, params, body }) => reviews.sendBack(deps, actor, params.revisionId, body.note))
  on(
    binder,
    contract.addComment,
  )(({ actor, params, body }) => comments.addComment(deps, actor, params.revisionId, body))
  on(binder, contract.resolveComment)(({ actor, params }) => comments.resolveComment(deps, actor, params.commentId))
  on(
    binder,
    contract.getHistory,
  )(({ actor, params, query }) => history.getHistory(deps, actor, params.vehicleId, query.kind))
  on(
    binder,
    contract.restoreRevision,
  )(({ actor, params, body }) => history.restoreRevision(deps, actor, params.revisionId, body.note))
}
