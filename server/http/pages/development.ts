import type { Express } from 'express'
import type { Render, Renderer } from '#server/http/pages/renderer.ts'

/** The site from its sources, through Vite: for `npm run dev` only. */
export interface Development {
  readonly renderer: Renderer
  readonly mount: (app: Express) => void
  close(): Promise<void>
}

const ENTRY = '/@evenpenny/entry.js'
// One module that loads the rest in order: React's fast refresh must be there before the first component.
const ENTRY_SOURCE = `import refresh from '/@react-refresh'
refresh.injectIntoGlobalHook(window)
window.$RefreshReg$ = () => {}
window.$RefreshSig$ = () => (type) => type
await import('/@vite/client')
await import('/src/entry/client.tsx')
`

export async function startDevelopment(root: string): Promise<Development> {
  const { createServer } = await import('vite')
  const vite = await createServer({ root, server: { middlewareMode: true }, appType: 'custom' })
  const render: Render = async (request, context) => {
    const module = (await vite.ssrLoadModule('/src/entry/server.tsx')) as { render: Render }
    return module.render(request, context)
  }
  return {
    renderer: { render, assets: { scripts: [ENTRY], styles: ['/src/app/app.css?direct'], preload: [] } },
    mount(app) {
      // Vite puts styles and scripts into the page as it runs: the policy of the real site would stop it.
      app.use((_request, response, next) => {
        const set = response.setHeader.bind(response)
        response.setHeader = (name, value) => (/^content-security-policy$/i.test(name) ? response : set(name, value))
        next()
      })
      app.use(ENTRY, (_request, response) => {
        response.type('text/javascript').send(ENTRY_SOURCE)
      })
      // Vite's files have no rules of ours: they are there in development only.
      app.use((request, response, next) => vite.middlewares(request, response, next))
    },
    close: () => vite.close(),
  }
}
