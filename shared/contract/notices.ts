/** Notices: what a person is told, in the list and by mail, and which kinds they choose. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { Id, Instant } from '../wire.ts'

export const noticeKinds = ['review-asked', 'sent-back', 'signed', 'comment', 'log-failed'] as const
export const NoticeKind = z.enum(noticeKinds)
export type NoticeKind = z.infer<typeof NoticeKind>

export const Notice = z.object({
  id: z.number().int(),
  kind: NoticeKind,
  at: Instant,
  title: z.string(),
  words: z.string(),
  /** Address of the page it speaks of, without the host. */
  path: z.string(),
  vehicleId: Id,
  read: z.boolean(),
})
export type Notice = z.infer<typeof Notice>

export const NoticeChoice = z.strictObject({ kind: NoticeKind, inApp: z.boolean(), mail: z.boolean() })
export type NoticeChoice = z.infer<typeof NoticeChoice>

const Choices = z.strictObject({ choices: z.array(NoticeChoice).max(noticeKinds.length) })

export const listNotices = endpoint({
  method: 'GET',
  path: '/api/notices',
  access: 'signed-in',
  summary: 'What you were told in this workshop, newest first, and how much of it is unread',
  query: z.strictObject({ before: z.coerce.number().int().positive().optional() }),
  response: z.object({ notices: z.array(Notice), unread: z.number().int(), next: z.number().int().nullable() }),
})
export const readNotices = endpoint({
  method: 'POST',
  path: '/api/notices/reading',
  access: 'signed-in',
  summary: 'Mark your notices as read, up to and including one',
  body: z.strictObject({ upTo: z.number().int().positive() }),
  response: z.object({ unread: z.number().int() }),
})
export const getNoticeChoices = endpoint({
  method: 'GET',
  path: '/api/notice-choices',
  access: 'signed-in',
  summary: 'Which kinds of notices reach you, in the list and by mail',
  response: Choices,
})
export const setNoticeChoices = endpoint({
  method: 'PUT',
  path: '/api/notice-choices',
  access: 'signed-in',
  summary: 'Choose which kinds of notices reach you; kinds left out stay as they are',
  body: Choices,
  response: Choices,
})
