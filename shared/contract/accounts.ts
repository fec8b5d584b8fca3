/** People, workshops, sessions, invitations, access tokens, the audit trail. */
import { z } from 'zod'
import { roles } from '../access.ts'
import { endpoint } from '../endpoint.ts'
import { Done, Id, Instant } from '../wire.ts'

/** Bytes of a text in UTF-8. */
function utf8Length(text: string): number {
  let bytes = 0
  for (const point of text) {
    const code = point.codePointAt(0)!
    bytes += code < 0x80 ? 1 : code < 0x800 ? 2 : code < 0x10000 ? 3 : 4
  }
  return bytes
}

export const RoleName = z.enum(roles)
export const Email = z.email().max(254)
/** NIST SP 800-63B-4: length and no composition rule; bcrypt reads 72 bytes, longer ones are refused, never cut. */
export const Password = z
  .string()
  .min(12, 'A password needs at least 12 characters')
  .refine((text) => utf8Length(text) <= 72, 'A password may be at most 72 bytes long')
export const PersonName = z.string().trim().min(1, 'A name is needed').max(80)

export const Workshop = z.object({ id: Id, name: z.string(), allowOwnSignOff: z.boolean() })
export type Workshop = z.infer<typeof Workshop>

export const Me = z.object({
  person: z.object({ id: Id, name: z.string(), email: z.string() }),
  workshop: Workshop,
  roles: z.array(RoleName),
  workshops: z.array(z.object({ id: Id, name: z.string() })),
  demo: z.boolean(),
})
export type Me = z.infer<typeof Me>

export const Person = z.object({
  id: Id,
  name: z.string(),
  email: z.string(),
  roles: z.array(RoleName),
  joinedAt: Instant,
})
export type Person = z.infer<typeof Person>

export const Invitation = z.object({
  id: Id,
  email: z.string(),
  roles: z.array(RoleName),
  vehicleIds: z.array(Id),
  invitedBy: z.string(),
  createdAt: Instant,
  expiresAt: Instant,
})
export type Invitation = z.infer<typeof Invitation>

export const AccessToken = z.object({
  id: Id,
  label: z.string(),
  role: RoleName,
  createdAt: Instant,
  lastUsedAt: Instant.nullable(),
})
export type AccessToken = z.infer<typeof AccessToken>

export const AuditEntry = z.object({
  id: z.number(),
  at: Instant,
  personId: Id.nullable(),
  personName: z.string(),
  action: z.string(),
  subject: z.string(),
  vehicleId: Id.nullable(),
  facts: z.record(z.string(), z.unknown()),
})
export type AuditEntry = z.infer<typeof AuditEntry>

export const DemoMail = z.object({
  id: z.string(),
  at: Instant,
  to: z.string(),
  subject: z.string(),
  text: z.string(),
  html: z.string(),
})
export type DemoMail = z.infer<typeof DemoMail>

const TokenRef = z.strictObject({ token: z.string().min(20).max(200) })
const PersonRef = z.strictObject({ personId: Id })

export const getSetup = endpoint({
  method: 'GET',
  path: '/api/setup',
  access: 'public',
  summary: 'Whether this installation still waits for its first workshop',
  response: z.object({ needed: z.boolean(), demo: z.boolean(), demoMailbox: z.boolean() }),
})
export const setUp = endpoint({
  method: 'POST',
  path: '/api/setup',
  access: 'public',
  summary: 'Create the first workshop and its admin, once',
  body: z.strictObject({
    workshopName: z.string().trim().min(1).max(80),
    name: PersonName,
    email: Email,
    password: Password,
  }),
  response: Me,
})
export const signIn = endpoint({
  method: 'POST',
  path: '/api/session',
  access: 'public',
  summary: 'Sign in; the answer sets the session cookie',
  body: z.strictObject({ email: Email, password: z.string().min(1).max(200) }),
  response: Me,
})
export const signOut = endpoint({
  method: 'DELETE',
  path: '/api/session',
  access: 'signed-in',
  summary: 'End this session',
  response: Done,
})
export const signOutEverywhere = endpoint({
  method: 'DELETE',
  path: '/api/sessions',
  access: 'signed-in',
  summary: 'End every session of yours, this one included',
  response: Done,
})
export const getMe = endpoint({
  method: 'GET',
  path: '/api/me',
  access: 'signed-in',
  summary: 'Who is signed in, in which workshop, with which roles',
  response: Me,
})
export const changeWorkshop = endpoint({
  method: 'PUT',
  path: '/api/me/workshop',
  access: 'signed-in',
  summary: 'Work in another of your workshops',
  body: z.strictObject({ workshopId: Id }),
  response: Me,
})
export const askPasswordReset = endpoint({
  method: 'POST',
  path: '/api/password-resets',
  access: 'public',
  summary: 'Ask for a link that sets a new password; the answer is the same whether or not the account exists',
  body: z.strictObject({ email: Email }),
  response: Done,
})
export const resetPassword = endpoint({
  method: 'POST',
  path: '/api/password-resets/:token',
  access: 'public',
  summary: 'Set a new password with the link from the mail; ends every session',
  params: TokenRef,
  body: z.strictObject({ password: Password }),
  response: Done,
})
export const listPeople = endpoint({
  method: 'GET',
  path: '/api/people',
  access: 'people:read',
  summary: 'The people of the workshop',
  response: z.object({ people: z.array(Person) }),
})
export const changeRoles = endpoint({
  method: 'PATCH',
  path: '/api/people/:personId',
  access: 'people:manage',
  summary: 'Set the roles of a person',
  params: PersonRef,
  body: z.strictObject({ roles: z.array(RoleName).min(1) }),
  response: Person,
})
export const removePerson = endpoint({
  method: 'DELETE',
  path: '/api/people/:personId',
  access: 'people:manage',
  summary: 'Take a person out of the workshop; what they did stays in the audit trail',
  params: PersonRef,
  response: Done,
})
export const listInvitations = endpoint({
  method: 'GET',
  path: '/api/invitations',
  access: 'people:manage',
  summary: 'Invitations that were not yet taken up',
  response: z.object({ invitations: z.array(Invitation) }),
})
export const invite = endpoint({
  method: 'POST',
  path: '/api/invitations',
  access: 'people:manage',
  summary: 'Invite somebody by e-mail; owners are put on vehicles at once',
  body: z.strictObject({
    email: Email,
    roles: z.array(RoleName).min(1),
    vehicleIds: z.array(Id).max(100).default([]),
  }),
  response: Invitation,
})
export const withdrawInvitation = endpoint({
  method: 'DELETE',
  path: '/api/invitations/:invitationId',
  access: 'people:manage',
  summary: 'Take an invitation back',
  params: z.strictObject({ invitationId: Id }),
  response: Done,
})
export const readInvitation = endpoint({
  method: 'GET',
  path: '/api/invitation-links/:token',
  access: 'public',
  summary: 'What an invitation link is for',
  params: TokenRef,
  response: z.object({
    workshopName: z.string(),
    email: z.string(),
    roles: z.array(RoleName),
    hasAccount: z.boolean(),
  }),
})
export const acceptInvitation = endpoint({
  method: 'POST',
  path: '/api/invitation-links/:token',
  access: 'public',
  summary: 'Join the workshop; who already has an account gives its password',
  params: TokenRef,
  body: z.strictObject({ name: PersonName, password: Password }),
  response: Me,
})
export const changeWorkshopSettings = endpoint({
  method: 'PATCH',
  path: '/api/workshop',
  access: 'workshop:manage',
  summary: 'Name of the workshop, and whether authors may sign their own revisions',
  body: z.strictObject({ name: z.string().trim().min(1).max(80).optional(), allowOwnSignOff: z.boolean().optional() }),
  response: Workshop,
})
export const listTokens = endpoint({
  method: 'GET',
  path: '/api/access-tokens',
  access: 'signed-in',
  summary: 'Your access tokens in this workshop (never their secret)',
  response: z.object({ tokens: z.array(AccessToken) }),
})
export const createToken = endpoint({
  method: 'POST',
  path: '/api/access-tokens',
  access: 'signed-in',
  summary: 'Make an access token for one of your roles; its secret is in this answer and nowhere else',
  body: z.strictObject({ label: z.string().trim().min(1).max(80), role: RoleName }),
  response: z.object({ token: AccessToken, secret: z.string() }),
})
export const revokeToken = endpoint({
  method: 'DELETE',
  path: '/api/access-tokens/:tokenId',
  access: 'signed-in',
  summary: 'Revoke one of your access tokens',
  params: z.strictObject({ tokenId: Id }),
  response: Done,
})
/** Which entries: of one vehicle, one person, a kind of action by how its name begins, and a span of days. */
const AuditFilter = z.strictObject({
  vehicleId: Id.optional(),
  personId: Id.optional(),
  action: z.string().max(60).optional(),
  /** Days in UTC, both included. */
  from: z.iso.date().optional(),
  to: z.iso.date().optional(),
})
export type AuditFilter = z.infer<typeof AuditFilter>

export const listAudit = endpoint({
  method: 'GET',
  path: '/api/audit',
  access: 'audit:read',
  summary: 'The audit trail, newest first',
  query: AuditFilter.extend({ before: z.coerce.number().int().positive().optional() }),
  response: z.object({ entries: z.array(AuditEntry), next: z.number().nullable() }),
})
export const exportAudit = endpoint({
  method: 'GET',
  path: '/api/audit.csv',
  access: 'audit:read',
  summary: 'The audit trail as CSV, newest first, with the same filters; text that a spreadsheet would run stays text',
  query: AuditFilter,
  produces: 'text/csv',
})
export const listDemoMails = endpoint({
  method: 'GET',
  path: '/api/demo/mails',
  access: 'public',
  summary: 'Mails caught by the demo mailbox; absent wherever a real mail server or no demo is set up',
  response: z.object({ mails: z.array(DemoMail) }),
})
