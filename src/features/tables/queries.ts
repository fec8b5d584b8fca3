/** Server state of fuel and target tables and their revisions. */
import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  bringTable,
  getRevision,
  listRevisions,
  markFlashed,
  previewTable,
  type TableKind,
} from '../../../shared/contract/tables.ts'
import { call } from '../../lib/api.ts'

export const tableQueries = {
  all: () => ['tables'] as const,
  list: (vehicleId: string) =>
    queryOptions({
      queryKey: [...tableQueries.all(), 'list', vehicleId],
      queryFn: ({ signal }) => call(listRevisions, { params: { vehicleId }, query: {}, signal }),
    }),
  detail: (revisionId: string) =>
    queryOptions({
      queryKey: [...tableQueries.all(), 'detail', revisionId],
      queryFn: ({ signal }) => call(getRevision, { params: { revisionId }, signal }),
    }),
}

export function usePreviewTable(vehicleId: string) {
  return useMutation({
    mutationFn: (body: { kind: TableKind; text: string }) => call(previewTable, { params: { vehicleId }, body }),
  })
}

export function useBringTable(vehicleId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (body: {
      kind: TableKind
      text: string
      origin: 'upload' | 'paste'
      note: string
      inEngine: boolean
    }) => call(bringTable, { params: { vehicleId }, body }),
    onSuccess: () => client.invalidateQueries(),
  })
}

export function useMarkFlashed(revisionId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (unsigned: boolean) => call(markFlashed, { params: { revisionId }, body: { unsigned } }),
    onSuccess: () => client.invalidateQueries(),
  })
}
