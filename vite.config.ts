import tailwindcss from '@tailwindcss/vite'
import react from '@vitejs/plugin-react'
import { defineConfig } from 'vite'

// The client goes to build/client, the server-rendering bundle to build/ssr (see the build script).
export default defineConfig(({ isSsrBuild }) => ({
  plugins: [react(), tailwindcss(), refuseServerImports()],
  build: {
    outDir: isSsrBuild ? 'build/ssr' : 'build/client',
    manifest: !isSsrBuild,
    emptyOutDir: true,
    sourcemap: true,
    rollupOptions: isSsrBuild ? {} : { input: 'src/entry/client.tsx' },
  },
}))

/** Nothing under src or shared may reach server code: tree-shaking is no guard, so the build fails instead. */
function refuseServerImports() {
  return {
    name: 'refuse-server-imports',
    enforce: 'pre' as const,
    resolveId(source: string, importer: string | undefined) {
      if (/^(#server\/|.*\/server\/)/.test(source) && importer && /\/(src|shared)\//.test(importer)) {
        throw new Error(`${importer} imports ${source}: src and shared never import server code.`)
      }
      return null
    },
  }
}
