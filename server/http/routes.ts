import type { Express } from 'express'
import { fileRules, pageRules } from '#server/http/authorisation/page-rules.ts'
import type { Registry } from '#server/http/endpoints/registry.ts'

interface Layer {
  readonly route?: { readonly path: string; readonly stack: readonly { readonly method?: string }[] }
  readonly handle: { readonly stack?: unknown }
}

/** Every route of a running application as "GET /path", from its own stack. Throws where a router hides routes in it. */
export function routesOf(app: Express): string[] {
  const { stack } = app.router as unknown as { stack: readonly Layer[] }
  return stack.flatMap(({ route, handle }) => {
    if (route) return [...new Set(route.stack.map(({ method }) => `${(method ?? 'all').toUpperCase()} ${route.path}`))]
    if (handle.stack !== undefined) throw new Error('A nested router hides its routes: put them onto the application.')
    return []
  })
}

/** Throws where a route of the application has no rule, or a rule no route: the application then does not start. */
export function checkEveryRouteHasItsRule(app: Express, registry: Registry): void {
  const ruled = new Set([
    ...registry.endpoints.map(({ method, path }) => `${method} ${path}`),
    ...[...Object.keys(pageRules), ...Object.keys(fileRules)].map((path) => `GET ${path}`),
  ])
  const routes = new Set(routesOf(app))
  const without = [...routes].filter((route) => !ruled.has(route))
  const unused = [...ruled].filter((rule) => !routes.has(rule))
  if (without.length + unused.length > 0) {
    throw new Error(
      `Routes and rules differ. Without a rule: ${without.join(', ')}. Without a route: ${unused.join(', ')}.`,
    )
  }
}
