/** Server state of drive logs: lists, one log, its traces, and what can be done to it. */
import { keepPreviousData, queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  changeLog,
  getLog,
  getTraces,
  inspectLog,
  listLogs,
  mapColumns,
  readLogAgain,
  removeLog,
  uploadLog,
  type ChannelName,
} from '../../../shared/contract/logs.ts'
import type { LogState } from '../../../shared/lifecycle.ts'
import { call } from '../../lib/api.ts'

const reading = (state: LogState | undefined): boolean => state === 'received' || state === 'reading'

export const logQueries = {
  all: () => ['logs'] as const,
  list: (vehicleId: string) =>
    queryOptions({
      queryKey: [...logQueries.all(), 'list', vehicleId],
      queryFn: ({ signal }) => call(listLogs, { params: { vehicleId }, signal }),
      refetchInterval: (query) => (query.state.data?.logs.some((log) => reading(log.state)) ? 700 : false),
    }),
  detail: (logId: string) =>
    queryOptions({
      queryKey: [...logQueries.all(), 'detail', logId],
      queryFn: ({ signal }) => call(getLog, { params: { logId }, signal }),
      refetchInterval: (query) => (reading(query.state.data?.state) ? 700 : false),
    }),
  inspection: (logId: string, version: number) =>
    queryOptions({
      queryKey: [...logQueries.all(), 'inspection', logId, version],
      queryFn: ({ signal }) => call(inspectLog, { params: { logId }, signal }),
      staleTime: Infinity,
    }),
  traces: (logId: string, channels: readonly ChannelName[], fromS?: number, toS?: number, points = 1000) =>
    queryOptions({
      queryKey: [...logQueries.all(), 'traces', logId, channels, fromS, toS, points],
      queryFn: ({ signal }) =>
        call(getTraces, { params: { logId }, query: { channels: channels.join(','), fromS, toS, points }, signal }),
      placeholderData: keepPreviousData,
      staleTime: Infinity,
    }),
}

export interface UploadInput {
  readonly file: File
  readonly title: string
  readonly recordedOn?: string
  readonly flashedRevisionId?: string
  readonly onProgress: (share: number) => void
  readonly signal: AbortSignal
}

export function useUploadLog(vehicleId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: ({ file, onProgress, signal, ...body }: UploadInput) =>
      call(uploadLog, { params: { vehicleId }, body, file, onProgress, signal }),
    onSuccess: () => client.invalidateQueries({ queryKey: logQueries.all() }),
  })
}

/** Changes to one log; each answers with the log, so lists are read again. */
export function useLogChanges(logId: string) {
  const client = useQueryClient()
  const onSuccess = () => client.invalidateQueries({ queryKey: logQueries.all() })
  return {
    change: useMutation({
      mutationFn: (body: {
        version: number
        title?: string
        note?: string
        recordedOn?: string | null
        flashedRevisionId?: string | null
      }) => call(changeLog, { params: { logId }, body }),
      onSuccess,
    }),
    map: useMutation({
      mutationFn: (columns: { index: number; channel: ChannelName | null; unit: string }[]) =>
        call(mapColumns, { params: { logId }, body: { columns } }),
      onSuccess,
    }),
    readAgain: useMutation({ mutationFn: () => call(readLogAgain, { params: { logId } }), onSuccess }),
    remove: useMutation({ mutationFn: () => call(removeLog, { params: { logId } }), onSuccess }),
  }
}
