/** Who is signed in, for every page behind the sign-in. */
import { queryOptions, useQuery } from '@tanstack/react-query'
import { can, type Permission } from '../../shared/access.ts'
import { getMe, type Me } from '../../shared/contract/accounts.ts'
import { call } from './api.ts'

export const meQuery = queryOptions({
  queryKey: ['me'] as const,
  queryFn: ({ signal }) => call(getMe, { signal }),
  staleTime: 60_000,
  retry: false,
})

/** @throws Error outside the signed-in part of the route table, where nobody is known. */
export function useMe(): Me {
  const { data } = useQuery(meQuery)
  if (!data) throw new Error('useMe is for pages behind the sign-in')
  return data
}

export const useCan = (permission: Permission): boolean => can(useMe().roles, permission)
