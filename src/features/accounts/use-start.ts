/** Calls that start a session: what they answer is who is signed in, and the page goes on to where it was wanted. */
import { useMutation, useQueryClient } from '@tanstack/react-query'
import { useNavigate, useSearchParams } from 'react-router-dom'
import type { Me } from '../../../shared/contract/accounts.ts'
import { meQuery } from '../../lib/session.ts'

export function useStart<Input>(start: (input: Input) => Promise<Me>) {
  const client = useQueryClient()
  const navigate = useNavigate()
  const [search] = useSearchParams()
  return useMutation({
    mutationFn: start,
    onSuccess: (me) => {
      client.clear()
      client.setQueryData(meQuery.queryKey, me)
      const wanted = search.get('to') ?? '/'
      // Only an address of ours: "//elsewhere" would leave the site.
      void navigate(/^\/(?![/\\])/.test(wanted) ? wanted : '/')
    },
  })
}
