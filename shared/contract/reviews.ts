/** Review of a revision: submit, comment, sign off or send back. */
import { z } from 'zod'
import { checklistKeys } from '../cautions.ts'
import { endpoint } from '../endpoint.ts'
import { Id, Instant, Numbers } from '../wire.ts'
import { Revision, RevisionRef, TableKind } from './tables.ts'
import { VehicleRef } from './vehicles.ts'

const Named = z.object({ id: Id, name: z.string() })

export const Comment = z.object({
  id: Id,
  revisionId: Id,
  /** Cell index, or null for the revision as a whole. */
  cell: z.number().int().nullable(),
  author: Named,
  at: Instant,
  text: z.string(),
  /** Whom it speaks to: the people named in it by "@" and their name. */
  mentions: z.array(Named),
  resolvedAt: Instant.nullable(),
  resolvedBy: z.string().nullable(),
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

/** The change in figures. Leaner and richer are of the mixture: less VE or more lambda is leaner. */
export const ChangeSummary = z.object({
  changed: z.number().int(),
  leaner: z.number().int(),
  richer: z.number().int(),
  /** The step furthest from zero, and the middle one, in % of the value before. */
  largestPct: z.number(),
  medianPct: z.number(),
  /** Of the changed cells: at high load, leaner there, on less than 5 s of evidence, set or pinned by hand. */
  highLoad: z.number().int(),
  highLoadLeaner: z.number().int(),
  thin: z.number().int(),
  byHand: z.number().int(),
  held: z.number().int(),
})
export type ChangeSummary = z.infer<typeof ChangeSummary>

export const Review = z.object({
  revisionId: Id,
  /** Cells that deserve a look before the rest, by risk: lean-ward at high load, then size, then by hand. */
  lookFirst: z.array(LookFirst),
  /** Null where there is no table of the same axes before it. */
  summary: ChangeSummary.nullable(),
  /** False when the stored cells no longer give the checksum: then nothing may be signed or driven. */
  intact: z.boolean(),
  comments: z.array(Comment),
  /** Other revisions made from the same one: what they changed is not in this one. */
  beside: z.array(z.object({ id: Id, number: z.number().int() })),
  /** Whom a comment can name. */
  mentionable: z.array(Named),
  history: z.array(
    z.object({
      at: Instant,
      who: z.string(),
      move: z.string(),
      note: z.string(),
      /** For a sign-off: how many of the cautions were ticked; null for the other moves. */
      ticked: z.number().int().nullable(),
    }),
  ),
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
    /** The cautions the signer ticked; the record of the signature says how many. */
    checklist: z.array(z.enum(checklistKeys)).max(checklistKeys.length).optional(),
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
  summary: 'Comment on a revision or on one of its cells; "@" and a name tells that person',
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

/** One revision in the history, beside its line in the list of revisions. */
export const HistoryEntry = z.object({
  revisionId: Id,
  /** Numbers of the revision before it and of those made from it; several mean that the history branches there. */
  parentNumber: z.number().int().nullable(),
  childNumbers: z.array(z.number().int()),
  /** Change of each cell in % against the revision before, 0 where it did not change; null where axes differ. */
  changePct: Numbers.nullable(),
  cols: z.number().int(),
  openComments: z.number().int(),
})
export type HistoryEntry = z.infer<typeof HistoryEntry>

export const getHistory = endpoint({
  method: 'GET',
  path: '/api/vehicles/:vehicleId/history',
  access: 'table:read',
  summary: 'What changed in each revision of a table, where the history branches, and what is still talked about',
  params: VehicleRef,
  query: z.strictObject({ kind: TableKind.default('ve') }),
  response: z.object({ entries: z.array(HistoryEntry) }),
})
export const restoreRevision = endpoint({
  method: 'POST',
  path: '/api/revisions/:revisionId/restoration',
  access: 'table:edit',
  summary: 'Make a new draft with the cells of an earlier revision; nothing is overwritten',
  params: RevisionRef,
  body: z.strictObject({ note: note.default('') }),
  response: Revision,
})
