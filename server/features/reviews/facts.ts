/** What people are told of a revision: facts in, words out. Pure. */
import type { Fact } from '../notices/service.ts'

export interface RevisionFacts {
  readonly workshopId: string
  readonly vehicleId: string
  readonly revisionId: string
  readonly vehicle: string
  readonly number: number
  readonly who: string
  readonly note: string
}

const about = ({ workshopId, vehicleId, revisionId, number }: RevisionFacts) => ({
  workshopId,
  vehicleId,
  linkWords: `Open revision ${number}`,
  path: `/vehicles/${vehicleId}/revisions/${revisionId}`,
})
const said = ({ note, who }: RevisionFacts): string[] => (note === '' ? [] : [`${who} writes: “${note}”`])
const name = ({ number, vehicle }: RevisionFacts): string => `revision ${number} of ${vehicle}`
const Name = ({ number, vehicle }: RevisionFacts): string => `Revision ${number} of ${vehicle}`

export const reviewAsked = (facts: RevisionFacts): Fact => ({
  ...about(facts),
  kind: 'review-asked',
  title: `${Name(facts)} waits for you`,
  words: [`${facts.who} has sent ${name(facts)} for sign-off.`, ...said(facts)],
})

export const wasSentBack = (facts: RevisionFacts): Fact => ({
  ...about(facts),
  kind: 'sent-back',
  title: `${Name(facts)} was sent back`,
  words: [`${facts.who} has sent ${name(facts)} back.`, ...said(facts)],
})

export const wasSigned = (facts: RevisionFacts): Fact => ({
  ...about(facts),
  kind: 'signed',
  title: `${Name(facts)} is signed`,
  words: [
    `${facts.who} has signed ${name(facts)}. It cannot change any more.`,
    ...said(facts),
    'A sign-off is a record of review, not a guarantee. Listen for knock on the first pull and stop at any doubt.',
  ],
})

export const wasCommented = (facts: RevisionFacts): Fact => ({
  ...about(facts),
  kind: 'comment',
  title: `${facts.who} commented on ${name(facts)}`,
  words: said(facts),
})

export const namesYou = (facts: RevisionFacts): Fact => ({
  ...wasCommented(facts),
  title: `${facts.who} names you in a comment on ${name(facts)}`,
})
