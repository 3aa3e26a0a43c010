import type { ServerResponse } from 'node:http'
import { basename, join } from 'node:path'
import express, { type Express } from 'express'
import { FIXED_FILES } from '#server/http/authorisation/page-rules.ts'

/** Built files whose names change with their content, and the few that have fixed names. `build` is the build's folder. */
export function mountStaticFiles(app: Express, build: string): void {
  const client = join(build, 'client')
  const options = { index: false, redirect: false, fallthrough: false } as const
  app.get('/assets/*path', express.static(client, { ...options, immutable: true, maxAge: '365d', setHeaders }))
  for (const name of FIXED_FILES) {
    app.get(`/${name}`, express.static(client, { ...options, maxAge: '1d' }))
  }
}

/**
 * The worker that checks archives hashes in WebAssembly, four times as fast as in JavaScript. A worker obeys the policy that
 * its own file is sent with, so this one may, and no page may.
 */
const WORKER_POLICY = "default-src 'none'; script-src 'self' 'wasm-unsafe-eval'; connect-src 'self'"

function setHeaders(response: ServerResponse, path: string): void {
  if (/^check-worker-[\w-]+\.js$/.test(basename(path))) response.setHeader('Content-Security-Policy', WORKER_POLICY)
}
