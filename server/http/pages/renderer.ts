import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** Addresses of the built browser code, as the page names them. */
export interface PageAssets {
  readonly scripts: readonly string[]
  readonly styles: readonly string[]
  readonly preload: readonly string[]
}

/** What a page is rendered with. */
export interface RenderContext {
  /** Calls the API in process, as the person who asks for the page. */
  readonly api: ApiClient
  readonly nonce: string
  readonly assets: PageAssets
  readonly origin: string
  /** The moment of the request, `YYYY-MM-DDThh:mm:ssZ`. */
  readonly now: string
  /** Told of what went wrong inside, for the log. */
  readonly onError: (error: unknown) => void
}

export interface RenderedPage {
  readonly status: number
  readonly headers: Readonly<Record<string, string>>
  pipe(destination: NodeJS.WritableStream): void
}

/** The built bundle's one function: a page, or a Response for a redirect. */
export type Render = (request: Request, context: RenderContext) => Promise<RenderedPage | Response>

export interface Renderer {
  readonly render: Render
  readonly assets: PageAssets
}

const CLIENT_ENTRY = 'src/entry/client.tsx'

interface ManifestChunk {
  readonly file: string
  readonly css?: readonly string[]
  readonly imports?: readonly string[]
  readonly assets?: readonly string[]
}

/** Loads what `npm run build` made in the folder `build`. Throws with what to do where it is not there. */
export async function loadRenderer(build: string): Promise<Renderer> {
  const bundle = join(build, 'ssr', 'server.js')
  const manifest = join(build, 'client', '.vite', 'manifest.json')
  for (const file of [bundle, manifest]) {
    if (!existsSync(file)) throw new Error(`${file} is missing. Run "npm run build" first.`)
  }
  const module = (await import(pathToFileURL(bundle).href)) as { render?: unknown }
  if (typeof module.render !== 'function') throw new Error(`${bundle} exports no render function.`)
  return {
    render: module.render as Render,
    assets: assetsOf(JSON.parse(readFileSync(manifest, 'utf8')) as Record<string, ManifestChunk>),
  }
}

/** The entry's script, the style sheets and further chunks that it needs at once, from Vite's manifest. */
export function assetsOf(manifest: Readonly<Record<string, ManifestChunk>>): PageAssets {
  const entry = manifest[CLIENT_ENTRY]
  if (!entry) throw new Error(`The manifest of the build does not name ${CLIENT_ENTRY}.`)
  const seen = new Set<string>()
  const styles = new Set<string>()
  const preload = new Set<string>()
  const visit = (key: string) => {
    const chunk = manifest[key]
    if (!chunk || seen.has(key)) return
    seen.add(key)
    for (const style of chunk.css ?? []) styles.add(`/${style}`)
    if (key !== CLIENT_ENTRY) preload.add(`/${chunk.file}`)
    for (const next of chunk.imports ?? []) visit(next)
  }
  visit(CLIENT_ENTRY)
  return { scripts: [`/${entry.file}`], styles: [...styles], preload: [...preload] }
}
