import { createHash } from 'node:crypto'
import { readFile } from 'node:fs/promises'
import { join } from 'node:path'
import type { Express } from 'express'
import { problem } from '#server/http/problems.ts'

interface CheckPage {
  readonly bytes: Buffer
  readonly tag: string
  readonly policy: string
}

/**
 * `/check.html`: the check as one file, to be saved. It is sent with the policy that stands in its own head (only its own
 * script, by digest, and no connection), so that it behaves here as it does on a disk.
 */
export function mountCheckPage(app: Express, build: string): void {
  let kept: CheckPage | null = null
  app.get('/check.html', async (request, response) => {
    kept ??= await readCheckPage(join(build, 'check-page', 'check.html'))
    if (kept === null) throw problem(404, 'The check page is not built yet. Run "npm run build" first.')
    response.setHeader('Content-Security-Policy', `${kept.policy}; frame-ancestors 'none'`)
    response.setHeader('ETag', `"${kept.tag}"`)
    response.setHeader('Cache-Control', 'public, no-cache')
    if (request.fresh) response.status(304).end()
    else response.type('html').send(kept.bytes)
  })
}

async function readCheckPage(file: string): Promise<CheckPage | null> {
  const bytes = await readFile(file).catch(() => null)
  if (bytes === null) return null
  const policy = /<meta http-equiv="Content-Security-Policy" content="([^"]+)">/.exec(bytes.toString('utf8'))?.[1]
  if (policy === undefined) throw new Error(`${file} has no policy in its head: build it again.`)
  return { bytes, policy, tag: createHash('sha256').update(bytes).digest('hex') }
}
