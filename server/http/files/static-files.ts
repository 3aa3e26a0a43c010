import { join } from 'node:path'
import express, { type Express } from 'express'
import { FIXED_FILES } from '#server/http/authorisation/page-rules.ts'

/** Built files whose names change with their content, and the few that have fixed names. `build` is the build's folder. */
export function mountStaticFiles(app: Express, build: string): void {
  const client = join(build, 'client')
  const options = { index: false, redirect: false, fallthrough: false } as const
  app.get('/assets/*path', express.static(client, { ...options, immutable: true, maxAge: '365d' }))
  for (const name of FIXED_FILES) {
    app.get(`/${name}`, express.static(client, { ...options, maxAge: '1d' }))
  }
}
