/** The catalogue of everything that can be refused (RFC 9457): slug, status and title. There is no other list. */
import { z } from 'zod'

export const problems = {
  'not-signed-in': { status: 401, title: 'Sign in first' },
  'sign-in-failed': { status: 401, title: 'E-mail address and password do not match an account' },
  'not-allowed': { status: 403, title: 'Your role does not include this' },
  'wrong-origin': { status: 403, title: 'The request came from another site' },
  'token-scope': { status: 403, title: 'This access token does not carry that role' },
  'not-found': { status: 404, title: 'There is nothing here that you may see' },
  'no-such-address': { status: 404, title: 'There is no such address in the API' },
  'link-expired': { status: 410, title: 'This link has been used or has expired' },
  'input-invalid': { status: 422, title: 'Some of what was sent cannot be used' },
  'body-unreadable': { status: 400, title: 'The body of the request is not readable JSON' },
  'too-many-tries': { status: 429, title: 'Too many tries; wait a little' },
  'already-set-up': { status: 409, title: 'This installation already has a workshop' },
  'already-a-member': { status: 409, title: 'This person is already in the workshop' },
  'last-admin': { status: 409, title: 'A workshop needs at least one admin' },
  'changed-meanwhile': { status: 409, title: 'Somebody changed this while you were looking at it' },
  'table-unreadable': { status: 422, title: 'The table cannot be read' },
  'no-table-yet': { status: 409, title: 'The vehicle has no fuel table yet' },
  'no-target-yet': { status: 409, title: 'The vehicle has no target table yet' },
  'no-file': { status: 422, title: 'No file came with the upload' },
  'file-too-large': { status: 413, title: 'The file is larger than this installation accepts' },
  'quota-full': { status: 413, title: 'The workshop has used up its space for logs' },
  'log-duplicate': { status: 409, title: 'This log is already here' },
  'log-in-use': { status: 409, title: 'A revision was learned from this log' },
  'log-not-ready': { status: 409, title: 'The log is not ready to learn from' },
  'mapping-incomplete': { status: 422, title: 'The mapping lacks a channel that learning needs' },
  'no-logs': { status: 422, title: 'Choose at least one log' },
  'proposal-not-open': { status: 409, title: 'The proposal is not open for decisions' },
  'nothing-accepted': { status: 409, title: 'No cell changes: accept or set at least one' },
  'move-not-legal': { status: 409, title: 'The revision is not in a state that allows this' },
  'revision-already-signed': { status: 409, title: 'This revision is already signed' },
  'not-signed': { status: 409, title: 'This revision is not signed' },
  'own-revision': { status: 403, title: 'Somebody else must sign a revision you prepared' },
  'comments-open': { status: 409, title: 'A comment of yours is still open' },
  'server-busy': { status: 503, title: 'The server cannot do this at the moment' },
  unexpected: { status: 500, title: 'Something went wrong on our side' },
} as const satisfies Record<string, { status: number; title: string }>
export type ProblemSlug = keyof typeof problems

/** Where problem types are named; the last part of the address is the slug. */
export const problemBase = 'https://evenburn.example/problems/'

export const ProblemBody = z.object({
  type: z.string(),
  title: z.string(),
  status: z.number(),
  detail: z.string().optional(),
  instance: z.string().optional(),
  errors: z.array(z.object({ detail: z.string(), pointer: z.string() })).optional(),
})
export type ProblemBody = z.infer<typeof ProblemBody>
