import type { QueryExecuteOptions, QueryKey } from '@tanstack/react-query'
import { data, type RouterContextProvider } from 'react-router'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { Problem } from '#shared/schemas/problem.ts'
import { loadContext } from './app-context.ts'

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
    if (error instanceof Problem) throw data(error.details, { status: error.details.status || 503 })
    throw error
  }
}
