import type { Rule } from '#server/http/authorisation/decide.ts'

const visit: Rule = { permission: 'visit', on: 'site' }
const signedIn: Rule = { permission: 'use-account', on: 'site' }
const administer: Rule = { permission: 'administer', on: 'site' }

/**
 * The rule of every route that is not an endpoint, by its path in Express's notation; all are GET. What a page shows comes
 * through endpoints, each with its own rule: these keep people from pages on which they can do nothing at all.
 */
export const pageRules = {
  '/': visit,
  '/draws': visit,
  '/draws/:slug': visit,
  '/draws/:slug/picks/:pick': visit,
  '/draws/:slug/check': visit,
  '/draws/:slug/hall': visit,
  '/organisations': visit,
  '/organisations/:slug': visit,
  '/how-it-works': visit,
  '/developers': visit,
  '/log': visit,
  '/entry': visit,
  '/entry/:token': visit,
  '/sign-in': visit,
  '/password-resets': visit,
  '/password-resets/:token': visit,
  '/invitations/:token': visit,
  '/account': signedIn,
  '/office{/*path}': signedIn,
  '/admin{/*path}': administer,
  // Everything else: the page that says that there is no such page.
  '/{*path}': visit,
} as const satisfies Readonly<Record<string, Rule>>

/** What lies beside a draw's page, from the moment it is public (PROTOCOL section 9). */
export const DRAW_FILES = [
  'seal.json',
  'seal.sig',
  'seal.tsr',
  'entries.csv',
  'terms.txt',
  'site-key.pem',
  'result.json',
  'result.sig',
  'transcript.jsonl',
  'labels.jsonl',
  'proof.zip',
] as const
export type DrawFile = (typeof DRAW_FILES)[number]

/** Files of the build that keep their names. */
export const FIXED_FILES = ['favicon.svg', 'card.png', 'entrants-sample.csv'] as const

export const fileRules: Readonly<Record<string, Rule>> = Object.fromEntries(
  [
    ...DRAW_FILES.map((name) => `/draws/:slug/${name}`),
    ...FIXED_FILES.map((name) => `/${name}`),
    '/embed/draws/:slug',
    '/draws/:slug/card.svg',
    '/draws/:slug/qr.svg',
    '/organisations/:slug/qr.svg',
    '/organisations/:slug/feed.atom',
    '/check.html',
    '/entry/:token/receipt.json',
    '/entry/:token/short-proof.json',
    '/site-keys.json',
    '/healthz',
    '/robots.txt',
    '/api/v1/openapi.json',
    '/sitemap.xml',
    '/log/checkpoint.txt',
    '/assets/*path',
  ].map((path) => [path, visit]),
)
