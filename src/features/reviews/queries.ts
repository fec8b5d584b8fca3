/** Server state of a revision's review, and the moves a person can make. */
import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  addComment,
  getHistory,
  getReview,
  resolveComment,
  restoreRevision,
  sendBack,
  signOff,
  submitRevision,
  withdrawRevision,
} from '../../../shared/contract/reviews.ts'
import type { ChecklistKey } from '../../../shared/cautions.ts'
import type { Revision, TableKind } from '../../../shared/contract/tables.ts'
import { call } from '../../lib/api.ts'

export const reviewQueries = {
  all: () => ['reviews'] as const,
  detail: (revisionId: string) =>
    queryOptions({
      queryKey: [...reviewQueries.all(), 'detail', revisionId],
      queryFn: ({ signal }) => call(getReview, { params: { revisionId }, signal }),
    }),
  history: (vehicleId: string, kind: TableKind) =>
    queryOptions({
      queryKey: [...reviewQueries.all(), 'history', vehicleId, kind],
      queryFn: ({ signal }) => call(getHistory, { params: { vehicleId }, query: { kind }, signal }),
    }),
}

/** Every move changes the revision, its review, lists and the bench, so all of it is read again. */
function useMove<Input, Result>(mutationFn: (input: Input) => Promise<Result>) {
  const client = useQueryClient()
  return useMutation({ mutationFn, onSuccess: () => client.invalidateQueries() })
}

export function useReviewMoves(revisionId: string) {
  const params = { revisionId }
  return {
    submit: useMove((note: string) => call(submitRevision, { params, body: { note } })),
    withdraw: useMove<undefined, Revision>(() => call(withdrawRevision, { params })),
    sign: useMove((body: { name: string; checksum: string; note: string; checklist: ChecklistKey[] }) =>
      call(signOff, { params, body }),
    ),
    sendBack: useMove((note: string) => call(sendBack, { params, body: { note } })),
    comment: useMove((body: { cell: number | null; text: string }) => call(addComment, { params, body })),
    restore: useMove((note: string) => call(restoreRevision, { params, body: { note } })),
    resolve: useMove((commentId: string) => call(resolveComment, { params: { commentId } })),
  }
}
