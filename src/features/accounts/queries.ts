/** Server state of people, invitations, access tokens, the audit trail and the demo's mails. */
import {
  infiniteQueryOptions,
  keepPreviousData,
  queryOptions,
  useMutation,
  useQueryClient,
} from '@tanstack/react-query'
import type { Role } from '../../../shared/access.ts'
import {
  changeRoles,
  changeWorkshop,
  changeWorkshopSettings,
  createToken,
  getSetup,
  invite,
  listAudit,
  listDemoMails,
  listInvitations,
  listPeople,
  listTokens,
  type AuditFilter,
  readInvitation,
  removePerson,
  revokeToken,
  withdrawInvitation,
} from '../../../shared/contract/accounts.ts'
import { call } from '../../lib/api.ts'

export const accountQueries = {
  all: () => ['accounts'] as const,
  setup: () =>
    queryOptions({ queryKey: [...accountQueries.all(), 'setup'], queryFn: ({ signal }) => call(getSetup, { signal }) }),
  people: () =>
    queryOptions({
      queryKey: [...accountQueries.all(), 'people'],
      queryFn: ({ signal }) => call(listPeople, { signal }),
    }),
  invitations: () =>
    queryOptions({
      queryKey: [...accountQueries.all(), 'invitations'],
      queryFn: ({ signal }) => call(listInvitations, { signal }),
    }),
  invitation: (token: string) =>
    queryOptions({
      queryKey: [...accountQueries.all(), 'invitation', token],
      queryFn: ({ signal }) => call(readInvitation, { params: { token }, signal }),
      retry: false,
    }),
  tokens: () =>
    queryOptions({
      queryKey: [...accountQueries.all(), 'tokens'],
      queryFn: ({ signal }) => call(listTokens, { signal }),
    }),
  mails: () =>
    queryOptions({
      queryKey: [...accountQueries.all(), 'mails'],
      queryFn: ({ signal }) => call(listDemoMails, { signal }),
      refetchInterval: 2_000,
    }),
  audit: (filter: AuditFilter) =>
    infiniteQueryOptions({
      queryKey: [...accountQueries.all(), 'audit', filter],
      queryFn: ({ signal, pageParam }) =>
        call(listAudit, { query: { ...filter, ...(pageParam === null ? {} : { before: pageParam }) }, signal }),
      placeholderData: keepPreviousData,
      initialPageParam: null as number | null,
      getNextPageParam: (page) => page.next,
    }),
}

/** Changes of the workshop; every list of people is read again afterwards. */
export function useWorkshopChanges() {
  const client = useQueryClient()
  const onSuccess = () => client.invalidateQueries()
  return {
    invite: useMutation({
      mutationFn: (body: { email: string; roles: Role[]; vehicleIds: string[] }) => call(invite, { body }),
      onSuccess,
    }),
    withdraw: useMutation({
      mutationFn: (invitationId: string) => call(withdrawInvitation, { params: { invitationId } }),
      onSuccess,
    }),
    roles: useMutation({
      mutationFn: ({ personId, roles }: { personId: string; roles: Role[] }) =>
        call(changeRoles, { params: { personId }, body: { roles } }),
      onSuccess,
    }),
    remove: useMutation({ mutationFn: (personId: string) => call(removePerson, { params: { personId } }), onSuccess }),
    settings: useMutation({
      mutationFn: (body: { allowOwnSignOff: boolean }) => call(changeWorkshopSettings, { body }),
      onSuccess,
    }),
    workshop: useMutation({
      mutationFn: (workshopId: string) => call(changeWorkshop, { body: { workshopId } }),
      onSuccess,
    }),
    createToken: useMutation({
      mutationFn: (body: { label: string; role: Role }) => call(createToken, { body }),
      onSuccess,
    }),
    revokeToken: useMutation({
      mutationFn: (tokenId: string) => call(revokeToken, { params: { tokenId } }),
      onSuccess,
    }),
  }
}
