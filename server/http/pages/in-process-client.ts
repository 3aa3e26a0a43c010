import type { RequestContext } from '#server/http/endpoints/context.ts'
import type { Registry } from '#server/http/endpoints/registry.ts'
import type { ProblemOf } from '#server/http/problem-of.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** Calls the API without a network: the same parsing, rules, handlers and answers, and the same Problems. */
export function inProcessClient(registry: Registry, context: RequestContext, problemOf: ProblemOf): ApiClient {
  return {
    async call(endpoint, input = {}) {
      try {
        return await registry.call(endpoint, context, {
          params: input.params ?? {},
          query: input.query ?? {},
          body: input.body ?? {},
        })
      } catch (error) {
        throw problemOf(error)
      }
    },
  }
}
