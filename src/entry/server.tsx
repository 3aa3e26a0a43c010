import { dehydrate } from '@tanstack/react-query'
import type { ReactNode } from 'react'
import { renderToPipeableStream } from 'react-dom/server'
import { createStaticHandler, createStaticRouter, RouterContextProvider, StaticRouterProvider } from 'react-router'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { Document, type Assets } from '#src/app/document.tsx'
import { Providers } from '#src/app/providers.tsx'
import { routes } from '#src/app/routes.tsx'
import { escapeJson, routerState, type PageState } from '#src/app/state.ts'
import { loadContext } from '#src/lib/app-context.ts'
import { createQueryClient } from '#src/lib/query-client.ts'
import { collector } from './collect.ts'

export interface RenderContext {
  /** Reads in process, with the rights of the person who asked. */
  readonly api: ApiClient
  /** The Content-Security-Policy nonce of this answer. */
  readonly nonce: string
  readonly assets: Assets
  /** Scheme, host and port under which the site is reached. */
  readonly origin: string
  /** The server's time. Pages show the time that came with their data; this is for what has none. */
  readonly now: string
  /** Told of what went wrong, for the log; the reader gets an error page. */
  readonly onError?: (error: unknown) => void
}

export interface Rendered {
  readonly status: number
  readonly headers: Record<string, string>
  pipe(destination: NodeJS.WritableStream): void
}

const handler = createStaticHandler(routes)

/**
 * Renders the page at a request's address, whole: it waits for everything, so that the page is complete without
 * JavaScript. Gives a Response where the page sends the reader elsewhere. Fails only where React itself fails.
 */
export async function render(request: Request, context: RenderContext): Promise<Rendered | Response> {
  const queryClient = createQueryClient()
  const requestContext = new RouterContextProvider(new Map([[loadContext, { api: context.api, queryClient }]]))
  const routed = await handler.query(request, { requestContext })
  if (routed instanceof Response) return routed
  for (const error of Object.values(routed.errors ?? {})) {
    if (error instanceof Error) context.onError?.(error)
  }
  // Unknowable to whoever wrote the page's contents, so nobody's words can stand in for it.
  const placeholder = `state of ${context.nonce}`
  const document = (
    <Document assets={context.assets} state={placeholder}>
      <Providers app={{ api: context.api, origin: context.origin }} queryClient={queryClient}>
        <StaticRouterProvider
          router={createStaticRouter(handler.dataRoutes, routed)}
          context={routed}
          nonce={context.nonce}
          hydrate={false}
        />
      </Providers>
    </Document>
  )
  const html = await renderWhole(document, context)
  // After rendering, so that what components themselves put into the cache goes along.
  const state: PageState = {
    origin: context.origin,
    assets: context.assets,
    router: routerState(routed),
    query: dehydrate(queryClient),
  }
  queryClient.clear()
  const at = html.lastIndexOf(placeholder)
  const page = html.slice(0, at) + escapeJson(state) + html.slice(at + placeholder.length)
  return {
    status: routed.statusCode,
    headers: { 'content-type': 'text/html; charset=utf-8', 'cache-control': 'no-cache' },
    pipe(destination) {
      destination.end(page)
    },
  }
}

function renderWhole(document: ReactNode, context: RenderContext): Promise<string> {
  return new Promise((resolve, reject) => {
    const stream = renderToPipeableStream(document, {
      nonce: context.nonce,
      bootstrapModules: [...context.assets.scripts],
      onAllReady: () => stream.pipe(collector(resolve, reject)),
      onShellError: reject,
      onError: (error) => context.onError?.(error),
    })
  })
}
