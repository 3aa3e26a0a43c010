import { z } from 'zod'
import type { Endpoint } from '../endpoint.ts'
import { empty, hex32, instant } from '../values.ts'

/** The keys of the site, for whoever compares: what signs now, what signed before and when, and the key of the log. */
export const siteKeys = z.object({
  /** The log's name: the first line of its checkpoints. */
  log: z.string(),
  keys: z.array(
    z.object({
      /** SHA-256 of the key's SubjectPublicKeyInfo DER: what seals call `key`. */
      fingerprint: hex32,
      /** SubjectPublicKeyInfo in PEM. */
      publicKey: z.string(),
      since: instant,
      /** When another key took its place; null: it signs today. */
      until: instant.nullable(),
      /** The same key as one of the log (C2SP signed-note): what a witness follows. */
      logKey: z.string(),
    }),
  ),
})
export type SiteKeys = z.infer<typeof siteKeys>

export const getSiteKeys = {
  name: 'getSiteKeys',
  method: 'GET',
  path: '/api/site-keys',
  summary: 'The keys that the site signs and signed with',
  params: empty,
  query: empty,
  body: empty,
  response: siteKeys,
} as const satisfies Endpoint
