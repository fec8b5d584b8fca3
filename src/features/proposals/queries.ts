/** Server state of proposals: what is read, how long it is fresh, and the changes. */
import { keepPreviousData, queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  cancelProposal,
  carryOver,
  chooseLogs,
  decideCells,
  getMoved,
  getCellSamples,
  getProposal,
  listProposals,
  makeRevision,
  replayDrive,
  requestProposal,
  type Proposal,
} from '../../../shared/contract/proposals.ts'
import type { ProposalState } from '../../../shared/lifecycle.ts'
import { call } from '../../lib/api.ts'

const running = (state: ProposalState | undefined): boolean => state === 'queued' || state === 'learning'

const usedOf = (logs: Proposal['logs']) => logs.filter(({ used }) => used).map(({ id }) => id)

export const proposalQueries = {
  all: () => ['proposals'] as const,
  list: (vehicleId: string) =>
    queryOptions({
      queryKey: [...proposalQueries.all(), 'list', vehicleId],
      queryFn: ({ signal }) => call(listProposals, { params: { vehicleId }, signal }),
    }),
  detail: (proposalId: string) =>
    queryOptions({
      queryKey: [...proposalQueries.all(), 'detail', proposalId],
      queryFn: ({ signal }) => call(getProposal, { params: { proposalId }, signal }),
      refetchInterval: (query) => (running(query.state.data?.state) ? 700 : false),
    }),
  moved: (proposalId: string) =>
    queryOptions({
      queryKey: [...proposalQueries.all(), 'moved', proposalId],
      queryFn: ({ signal }) => call(getMoved, { params: { proposalId }, signal }),
    }),
  /** The readings behind a cell change with the logs in use, not with the decisions. */
  samples: ({ id, logs }: Proposal, cell: number) =>
    queryOptions({
      queryKey: [...proposalQueries.all(), 'samples', id, usedOf(logs), cell],
      queryFn: ({ signal }) => call(getCellSamples, { params: { proposalId: id, cell }, signal }),
      staleTime: Infinity,
    }),
  /** A drive with the table as decided: every version of the proposal gives another one. */
  replay: ({ id, version }: Proposal, query: { logId: string; fromS: number; toS: number }) =>
    queryOptions({
      queryKey: [...proposalQueries.all(), 'replay', id, version, query],
      queryFn: ({ signal }) => call(replayDrive, { params: { proposalId: id }, query, signal }),
      placeholderData: keepPreviousData,
      staleTime: Infinity,
    }),
}

export function useRequestProposal(vehicleId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (body: { logIds: string[]; stepCapPct: number }) =>
      call(requestProposal, { params: { vehicleId }, body }),
    onSuccess: () => client.invalidateQueries({ queryKey: proposalQueries.all() }),
  })
}

/** Sends decisions with the version they were made on; the answer replaces the proposal on the page. */
export function useDecideCells(proposalId: string) {
  const client = useQueryClient()
  const detail = proposalQueries.detail(proposalId)
  const mutation = useMutation({
    mutationFn: (body: {
      version: number
      cells: { cell: number; decision: Proposal['decisions'][number]; value?: number }[]
    }) => call(decideCells, { params: { proposalId }, body }),
    onSuccess: (proposal) => {
      client.setQueryData(detail.queryKey, proposal)
    },
    // Refused because somebody else decided meanwhile: their decisions are fetched before anything more is sent.
    // Not waited for: without a connection that would take as long as its tries do.
    onError: () => {
      void client.invalidateQueries({ queryKey: detail.queryKey })
    },
  })
  return {
    decide: mutation.mutateAsync,
    error: mutation.error,
    fetchAgain: () => client.fetchQuery({ ...detail, staleTime: 0 }),
  }
}

/** Switches logs on or off; the answer is the proposal with its new surface. */
export function useChooseLogs(proposalId: string) {
  const client = useQueryClient()
  const { queryKey } = proposalQueries.detail(proposalId)
  return useMutation({
    mutationFn: (body: { version: number; logIds: string[] }) => call(chooseLogs, { params: { proposalId }, body }),
    onSuccess: (proposal) => {
      client.setQueryData(queryKey, proposal)
    },
    onError: () => client.invalidateQueries({ queryKey }),
  })
}

export function useCancelProposal(proposalId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: () => call(cancelProposal, { params: { proposalId } }),
    onSuccess: () => client.invalidateQueries({ queryKey: proposalQueries.all() }),
  })
}

export function useMakeRevision(proposalId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (body: { version: number; note: string }) => call(makeRevision, { params: { proposalId }, body }),
    onSuccess: () => client.invalidateQueries(),
  })
}

export interface CarryOverInput {
  readonly version: number
  readonly ontoId: string
  readonly answers: { cell: number; take: 'mine' | 'theirs' }[]
  readonly note: string
}

export function useCarryOver(proposalId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (body: CarryOverInput) => call(carryOver, { params: { proposalId }, body }),
    onSuccess: () => client.invalidateQueries(),
    // Refused because something moved again: what moved is shown before anything more is sent.
    onError: () => client.invalidateQueries({ queryKey: proposalQueries.moved(proposalId).queryKey }),
  })
}
