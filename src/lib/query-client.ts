/** How long answers are fresh, and which failures are worth a second try. */
import { QueryClient } from '@tanstack/react-query'
import { ApiProblem } from './api.ts'

export const newQueryClient = () =>
  new QueryClient({
    defaultOptions: {
      queries: {
        staleTime: 5_000,
        retry: (count, error) =>
          count < 2 && (!(error instanceof ApiProblem) || error.status === 0 || error.status >= 500),
      },
    },
  })
