/** Use cases of notices: telling people of a fact within its transaction, reading what one was told, choosing. */
import { noticeKinds, type Notice, type NoticeChoice, type NoticeKind } from '../../../shared/contract/notices.ts'
import type { Deps } from '../../deps.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { notices } from '../../platform/db/schema/notices.ts'
import type { Actor } from '../../platform/http/actor.ts'
import { enqueueMail } from '../../platform/mail/send.ts'
import { noticeMessage } from './messages.ts'
import * as store from './store.ts'

export interface Fact {
  readonly kind: NoticeKind
  readonly workshopId: string
  readonly vehicleId: string
  /** The fact in one line; it is the mail's subject too. */
  readonly title: string
  /** What a person said, or what follows, one paragraph each. */
  readonly words: readonly string[]
  readonly linkWords: string
  /** Address of the page without the host. It is a place, never a secret. */
  readonly path: string
}

const both = { inApp: true, mail: true } as const

/** Tells each person once, in the ways they chose. Nothing is sent unless the transaction holds. */
export async function tell(deps: Deps, tx: Tx, personIds: Iterable<string>, fact: Fact): Promise<void> {
  const ids = [...new Set(personIds)]
  if (ids.length === 0) return
  const { workshopId, vehicleId, kind, title, path } = fact
  const chosen = new Map((await store.choicesOf(tx, workshopId, ids, kind)).map((row) => [row.personId, row]))
  for (const person of await store.membersAmong(tx, workshopId, ids)) {
    const choice = chosen.get(person.id) ?? both
    if (choice.inApp) {
      const words = fact.words.join('\n')
      await tx.insert(notices).values({ workshopId, personId: person.id, vehicleId, kind, title, words, path })
    }
    if (choice.mail) await enqueueMail(tx, person.email, noticeMessage(fact, deps.config.publicUrl))
  }
}

const pageSize = 50

const toNotice = ({ id, kind, title, words, path, vehicleId, ...row }: typeof notices.$inferSelect): Notice => ({
  id,
  kind,
  title,
  words,
  path,
  vehicleId,
  at: row.createdAt.toISOString(),
  read: row.readAt !== null,
})

export async function listNotices(deps: Deps, actor: Actor, before: number | undefined) {
  const rows = await store.noticesOf(deps.db, actor, before, pageSize)
  return {
    notices: rows.map(toNotice),
    unread: await store.countUnread(deps.db, actor),
    next: rows.length === pageSize ? (rows.at(-1)?.id ?? null) : null,
  }
}

export async function readNotices(deps: Deps, actor: Actor, upTo: number): Promise<{ unread: number }> {
  await store.markRead(deps.db, actor, upTo, deps.clock.now())
  return { unread: await store.countUnread(deps.db, actor) }
}

export async function getChoices(db: Reader, actor: Actor): Promise<{ choices: NoticeChoice[] }> {
  const rows = await store.choicesOf(db, actor.workshopId, [actor.personId])
  return {
    choices: noticeKinds.map((kind) => {
      const { inApp, mail } = rows.find((row) => row.kind === kind) ?? both
      return { kind, inApp, mail }
    }),
  }
}

export async function setChoices(deps: Deps, actor: Actor, choices: readonly NoticeChoice[]) {
  return deps.db.transaction(async (tx) => {
    for (const choice of choices) await store.saveChoice(tx, actor, choice)
    return getChoices(tx, actor)
  })
}
