/** Review of a revision: submit, comment, sign off or send back. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { Id, Instant } from '../wire.ts'
import { Revision, RevisionRef } from './tables.ts'

export const Comment = z.object({
  id: Id,
  revisionId: Id,
  /** Cell index, or null for the revision as a whole. */
  cell: z.number().int().nullable(),
  author: z.object({ id: Id, name: z.string() }),
  at: Instant,
  text: z.string(),
  resolvedAt: Instant.nullable(),
})
export type Comment = z.infer<typeof Comment>

export const LookFirst = z.object({
  cell: z.number().int(),
  why: z.string(),
  note: z.string(),
  before: z.number(),
  after: z.number(),
  changePct: z.number(),
  sigmaPct: z.number().nullable(),
  evidenceS: z.number().nullable(),
})
export type LookFirst = z.infer<typeof LookFirst>

export const Review = z.object({
  revisionId: Id,
  /** Cells that deserve a look before the rest, by risk: lean-ward at high load, then size, then by hand. */
  lookFirst: z.array(LookFirst),
  comments: z.array(Comment),
  history: z.array(z.object({ at: Instant, who: z.string(), move: z.string(), note: z.string() })),
  may: z.object({
    submit: z.boolean(),
    withdraw: z.boolean(),
    signOff: z.boolean(),
    sendBack: z.boolean(),
    comment: z.boolean(),
  }),
  /** Why the viewer may not sign, in words, or null. */
  whyNotSign: z.string().nullable(),
  signsOwn: z.boolean(),
})
export type Review = z.infer<typeof Review>

const note = z.string().trim().max(500)

export const getReview = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId/review',
  access: 'table:read',
  summary: 'What the reviewer needs: cells to look at first, comments, history, and what you may do',
  params: RevisionRef,
  response: Review,
})
export const submitRevision = endpoint({
  method: 'POST',
  path: '/api/revisions/:revisionId/submission',
  access: 'revision:submit',
  summary: 'Send a draft for sign-off; the reviewers are told by mail',
  params: RevisionRef,
  body: z.strictObject({ note: note.default('') }),
  response: Revision,
})
export const withdrawRevision = endpoint({
  method: 'DELETE',
  path: '/api/revisions/:revisionId/submission',
  access: 'revision:submit',
  summary: 'Take a submitted revision back',
  params: RevisionRef,
  response: Revision,
})
export const signOff = endpoint({
  method: 'POST',
  path: '/api/revisions/:revisionId/sign-off',
  access: 'revision:sign-off',
  summary: 'Sign the revision; it can never change afterwards',
  params: RevisionRef,
  body: z.strictObject({
    /** The signer's own name, typed. */
    name: z.string().trim().min(1, 'Type your name to sign').max(80),
    /** The checksum that was looked at; signing something else is refused. */
    checksum: z.string().length(64),
    note: note.default(''),
  }),
  response: Revision,
})
export const sendBack = endpoint({
  method: 'POST',
  path: '/api/revisions/:revisionId/send-back',
  access: 'revision:sign-off',
  summary: 'Send the revision back with words',
  params: RevisionRef,
  body: z.strictObject({ note: note.min(1, 'Say what should change') }),
  response: Revision,
})
export const addComment = endpoint({
  method: 'POST',
  path: '/api/revisions/:revisionId/comments',
  access: 'revision:comment',
  summary: 'Comment on a revision or on one of its cells',
  params: RevisionRef,
  body: z.strictObject({
    cell: z.number().int().min(0).nullable().default(null),
    text: z.string().trim().min(1, 'A comment needs words').max(1000),
  }),
  response: Comment,
})
export const resolveComment = endpoint({
  method: 'POST',
  path: '/api/comments/:commentId/resolution',
  access: 'revision:comment',
  summary: 'Settle a comment; its author or the revision’s author may',
  params: z.strictObject({ commentId: Id }),
  response: Comment,
})
