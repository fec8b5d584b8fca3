/** How long answers are fresh, and which failures are worth a second try. */
import { QueryClient } from '@tanstack/react-query'
import { ApiProblem } from './api.ts'

export const newQueryClient = () =>
  new QueryClient({
    defaultOptions: {
      // At the roadside the product may run on the laptop itself: a browser that calls itself offline still reaches it, and
      // where it does not, the page must be told at once instead of waiting in silence.
      mutations: { networkMode: 'always' },
      queries: {
        networkMode: 'always',
        staleTime: 5_000,
        retry: (count, error) =>
          count < 2 && (!(error instanceof ApiProblem) || error.status === 0 || error.status >= 500),
      },
    },
  })
