import { join } from 'node:path'
import express, { type Express } from 'express'

/** Built files whose names change with their content, and the few that have fixed names. `build` is the build's folder. */
export function mountStaticFiles(app: Express, build: string): void {
  const client = join(build, 'client')
  const options = { index: false, redirect: false, fallthrough: false } as const
  app.get('/assets/*path', express.static(client, { ...options, immutable: true, maxAge: '365d' }))
  for (const name of ['favicon.svg', 'card.png', 'entrants-sample.csv']) {
    app.get(`/${name}`, express.static(client, { ...options, maxAge: '1d' }))
  }
}
