import { QueryClient } from '@tanstack/react-query'
import { problemOf } from './problem-of.ts'

/** One a request on the server, one a visit in the browser. What the reader did wrong is not tried again. */
export function createQueryClient(): QueryClient {
  return new QueryClient({
    defaultOptions: {
      queries: {
        staleTime: 5_000,
        retry: (failures, error) => {
          const status = problemOf(error)?.status ?? 500
          return typeof window !== 'undefined' && failures < 2 && (status === 0 || status >= 500)
        },
      },
    },
  })
}
