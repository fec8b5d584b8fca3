/** What every export says of a revision: its state, its name, the cautions, the file's name. Pure. */
import type { Revision } from '../../../shared/contract/tables.ts'

export const cautions = [
  'A wrong fuel table can destroy an engine or start a fire.',
  'Lean mixture under load melts pistons: have someone listen for knock on the first pull and stop at any doubt.',
  'Never operate the product while driving: a passenger, a dyno or a parked vehicle. Exhaust gas kills: run outdoors or with extraction.',
  'Changing calibration or emission equipment may be unlawful on the road; local law decides.',
  'A sign-off is a record of review, not a guarantee.',
] as const

const instant = new Intl.DateTimeFormat('en-GB', {
  day: 'numeric',
  month: 'long',
  year: 'numeric',
  hour: '2-digit',
  minute: '2-digit',
  timeZone: 'UTC',
})
/** Files travel, so their times are in UTC and say so. */
export const instantWords = (iso: string): string => `${instant.format(new Date(iso))} UTC`

export const isDraft = (revision: Revision): boolean => revision.state !== 'signed'

/** "DRAFT, NOT SIGNED" for everything that is not signed, whatever its state. */
export function stateWords(revision: Revision): string {
  const { signature, state } = revision
  if (signature && state === 'signed')
    return `Signed by ${signature.by.name}${signature.byAuthor ? ', its author,' : ''} on ${instantWords(signature.at)}`
  const where = { draft: '', submitted: ' (waits for review)', 'sent-back': ' (sent back)', signed: '' }[state]
  return `DRAFT, NOT SIGNED${where}`
}

export const tableName = (revision: Revision): string => (revision.kind === 've' ? 'fuel table' : 'target table')

export const fileName = (vehicle: string, revision: Revision, ending: string): string => {
  const plain = `${vehicle} ${tableName(revision)} ${revision.number}`.toLowerCase().replace(/[^\p{L}\p{N}]+/gu, '-')
  return `${plain}${isDraft(revision) ? '-DRAFT' : ''}.${ending}`
}
