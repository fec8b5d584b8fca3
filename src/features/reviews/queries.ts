/** Server state of a revision's review, and the moves a person can make. */
import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  addComment,
  getReview,
  resolveComment,
  sendBack,
  signOff,
  submitRevision,
  withdrawRevision,
} from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { call } from '../../lib/api.ts'

export const reviewQueries = {
  all: () => ['reviews'] as const,
  detail: (revisionId: string) =>
    queryOptions({
      queryKey: [...reviewQueries.all(), 'detail', revisionId],
      queryFn: ({ signal }) => call(getReview, { params: { revisionId }, signal }),
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
    sign: useMove((body: { name: string; checksum: string; note: string }) => call(signOff, { params, body })),
    sendBack: useMove((note: string) => call(sendBack, { params, body: { note } })),
    comment: useMove((body: { cell: number | null; text: string }) => call(addComment, { params, body })),
    resolve: useMove((commentId: string) => call(resolveComment, { params: { commentId } })),
  }
}
