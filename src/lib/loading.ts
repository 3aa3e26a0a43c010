import type { QueryExecuteOptions, QueryKey } from '@tanstack/react-query'
import { data, type RouterContextProvider } from 'react-router'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { loadContext } from './app-context.ts'
import { problemOf } from './problem-of.ts'

type Options<Data, Key extends QueryKey> = QueryExecuteOptions<Data, Error, Data, Data, Key>

/**
 * Puts an endpoint's answer into the query cache before a page renders. A {@link Problem} becomes the page's status and
 * error page; anything else is left to be reported.
 */
export async function load<Data, Key extends QueryKey>(
  args: { readonly context: unknown },
  options: (api: ApiClient) => Options<Data, Key>,
): Promise<Data> {
  const { api, queryClient } = (args.context as Readonly<RouterContextProvider>).get(loadContext)
  try {
    return await queryClient.query<Data, Error, Data, Data, Key>({ ...options(api), staleTime: 5_000 })
  } catch (error) {
    const problem = problemOf(error)
    if (problem) throw data(problem, { status: problem.status || 503 })
    throw error
  }
}
