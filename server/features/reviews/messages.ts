/** The reviews noun's mails: facts in, words out. */
import { writeMessage, type Message } from '../../platform/mail/send.ts'

export interface RevisionFacts {
  readonly vehicle: string
  readonly number: number
  readonly who: string
  readonly note: string
  readonly url: string
}

const said = (facts: RevisionFacts): string[] => (facts.note === '' ? [] : [`${facts.who} writes: “${facts.note}”`])

export const submittedMessage = (facts: RevisionFacts): Message =>
  writeMessage(
    `Revision ${facts.number} of ${facts.vehicle} waits for you`,
    [`${facts.who} has sent revision ${facts.number} of ${facts.vehicle} for sign-off.`, ...said(facts)],
    { words: `Open revision ${facts.number}`, url: facts.url },
  )

export const sentBackMessage = (facts: RevisionFacts): Message =>
  writeMessage(
    `Revision ${facts.number} of ${facts.vehicle} was sent back`,
    [`${facts.who} has sent revision ${facts.number} of ${facts.vehicle} back.`, ...said(facts)],
    { words: `Open revision ${facts.number}`, url: facts.url },
  )

export const signedMessage = (facts: RevisionFacts): Message =>
  writeMessage(
    `Revision ${facts.number} of ${facts.vehicle} is signed`,
    [
      `${facts.who} has signed revision ${facts.number} of ${facts.vehicle}. It cannot change any more.`,
      ...said(facts),
      'A sign-off is a record of review, not a guarantee. Listen for knock on the first pull and stop at any doubt.',
    ],
    { words: `Open revision ${facts.number}`, url: facts.url },
  )

export const commentMessage = (facts: RevisionFacts): Message =>
  writeMessage(`${facts.who} commented on revision ${facts.number} of ${facts.vehicle}`, [...said(facts)], {
    words: `Open revision ${facts.number}`,
    url: facts.url,
  })
