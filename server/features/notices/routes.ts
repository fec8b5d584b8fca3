/** Binds the notices endpoints; no logic. */
import * as contract from '../../../shared/contract/notices.ts'
import type { Deps } from '../../deps.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import * as notices from './service.ts'

export function mountNotices(binder: Binder, deps: Deps): void {
  on(binder, contract.listNotices)(({ actor, query }) => notices.listNotices(deps, actor, query.before))
  on(binder, contract.readNotices)(({ actor, body }) => notices.readNotices(deps, actor, body.upTo))
  on(binder, contract.getNoticeChoices)(({ actor }) => notices.getChoices(deps.db, actor))
  on(binder, contract.setNoticeChoices)(({ actor, body }) => notices.setChoices(deps, actor, body.choices))
}
