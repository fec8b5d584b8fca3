/** States of logs, proposals and revisions and the legal moves between them, as data. */

export const logStates = ['received', 'reading', 'ready', 'needs-mapping', 'rejected', 'failed'] as const
export type LogState = (typeof logStates)[number]

export const proposalStates = ['queued', 'learning', 'open', 'revised', 'failed', 'refused', 'cancelled'] as const
export type ProposalState = (typeof proposalStates)[number]

export const revisionStates = ['draft', 'submitted', 'sent-back', 'signed'] as const
export type RevisionState = (typeof revisionStates)[number]

export const revisionMoves = {
  submit: { from: ['draft', 'sent-back'], to: 'submitted' },
  withdraw: { from: ['submitted'], to: 'draft' },
  'send-back': { from: ['submitted'], to: 'sent-back' },
  'sign-off': { from: ['submitted'], to: 'signed' },
} as const satisfies Record<string, { from: readonly RevisionState[]; to: RevisionState }>
export type RevisionMove = keyof typeof revisionMoves

export function isLegal(move: RevisionMove, from: RevisionState): boolean {
  return (revisionMoves[move].from as readonly RevisionState[]).includes(from)
}

/** What a person may decide about a proposed cell; `open` takes a decision back. */
export const cellDecisions = ['open', 'accepted', 'kept', 'by-hand', 'pinned'] as const
export type CellDecision = (typeof cellDecisions)[number]
