import { createHash } from 'node:crypto'
import type { SiteKeys } from '#shared/schemas/api/site-keys.ts'

const hex = (text: string) => createHash('sha256').update(text).digest('hex')

/** A site that changed its key once. */
export const siteKeysFixture = (): SiteKeys => ({
  log: 'draws.site.example/log',
  keys: [
    {
      fingerprint: hex('key'),
      publicKey: '-----BEGIN PUBLIC KEY-----\n',
      since: '2026-02-01T09:00:00Z',
      until: null,
      logKey: 'draws.site.example/log+00000000+AQ==',
    },
    {
      fingerprint: hex('older key'),
      publicKey: '-----BEGIN PUBLIC KEY-----\n',
      since: '2025-03-01T09:00:00Z',
      until: '2026-02-01T09:00:00Z',
      logKey: 'draws.site.example/log+00000001+AQ==',
    },
  ],
})
