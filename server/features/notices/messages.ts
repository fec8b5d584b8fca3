/** A notice as a mail: the same words, one link, and why it came. Pure. */
import type { NoticeKind } from '../../../shared/contract/notices.ts'
import { writeMessage, type Message } from '../../platform/mail/send.ts'
import type { Fact } from './service.ts'

const reason: Record<NoticeKind, string> = {
  'review-asked': 'You get this because you may sign revisions in this workshop.',
  'sent-back': 'You get this because you prepared the revision.',
  signed: 'You get this because you prepared the revision or own the vehicle.',
  comment: 'You get this because you prepared the revision, spoke of it, or are named in the comment.',
  'log-failed': 'You get this because you uploaded the log.',
}

export const noticeMessage = (fact: Fact, publicUrl: string): Message =>
  writeMessage(
    fact.title,
    fact.words,
    { words: fact.linkWords, url: `${publicUrl}${fact.path}` },
    `${reason[fact.kind]} Choose what reaches you by mail: ${publicUrl}/notices`,
  )
