import { MutationCache, QueryCache, QueryClient } from '@tanstack/react-query'
import { ApiProblem, mayPass } from './api-problem.ts'
import { keys } from './keys.ts'

/** The one cache of the server's data. Only what may pass by itself is asked again, twice at most. */
export function createQueryClient(): QueryClient {
  // A session that ended elsewhere shows in any answer: the session itself is asked again and the screens follow it.
  const watch = (error: unknown) => {
    if (error instanceof ApiProblem && error.code === 'not-signed-in') {
      void client.invalidateQueries({ queryKey: keys.session })
    }
  }
  const client: QueryClient = new QueryClient({
    queryCache: new QueryCache({ onError: watch }),
    mutationCache: new MutationCache({ onError: watch }),
    defaultOptions: {
      queries: { staleTime: 15_000, retry: (failures, error) => failures < 2 && mayPass(error) },
      mutations: { retry: false },
    },
  })
  return client
}
