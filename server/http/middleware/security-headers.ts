import { randomBytes } from 'node:crypto'
import type { RequestHandler } from 'express'
import helmet from 'helmet'

/** A nonce is 128 bits, written as 22 base64url characters: always the same length, so that kept pages can be refilled. */
const NONCE_BYTES = 16
// Drawn from the system's generator in larger pieces: one call for each of a crowd's requests would be felt.
let pool = randomBytes(0)
let used = 0
export function newNonce(): string {
  if (used + NONCE_BYTES > pool.length) {
    pool = randomBytes(NONCE_BYTES * 256)
    used = 0
  }
  used += NONCE_BYTES
  return pool.toString('base64url', used - NONCE_BYTES, used)
}

/** The nonce of this response, made by {@link securityHeaders}. */
export function nonceOf(response: { locals: Record<string, unknown> }): string {
  const nonce = response.locals.nonce
  if (typeof nonce !== 'string') throw new Error('The security headers run before everything that needs a nonce.')
  return nonce
}

/**
 * Content-Security-Policy (Level 3) with a nonce for each response, and its companions. Everything comes from the site
 * itself; nothing may frame it. `https` adds HSTS and upgrades.
 */
export function securityHeaders(options: { readonly https: boolean }): RequestHandler[] {
  const nonce = (response: unknown) => `'nonce-${nonceOf(response as { locals: Record<string, unknown> })}'`
  return [
    (_request, response, next) => {
      response.locals.nonce = newNonce()
      next()
    },
    helmet({
      contentSecurityPolicy: {
        useDefaults: false,
        directives: {
          defaultSrc: ["'none'"],
          scriptSrc: ["'self'", (_request, response) => nonce(response)],
          styleSrc: ["'self'", (_request, response) => nonce(response)],
          imgSrc: ["'self'", 'data:'],
          fontSrc: ["'self'"],
          connectSrc: ["'self'"],
          workerSrc: ["'self'"],
          manifestSrc: ["'self'"],
          objectSrc: ["'none'"],
          baseUri: ["'none'"],
          formAction: ["'self'"],
          frameAncestors: ["'none'"],
          ...(options.https ? { upgradeInsecureRequests: [] } : {}),
        },
      },
      strictTransportSecurity: options.https ? { maxAge: 63_072_000, includeSubDomains: true } : false,
      // Addresses of private pages carry tokens: nothing of them goes to another site, not even by a link.
      referrerPolicy: { policy: 'same-origin' },
      frameguard: { action: 'deny' },
      crossOriginResourcePolicy: { policy: 'same-origin' },
    }),
    (_request, response, next) => {
      response.setHeader('Permissions-Policy', 'camera=(), microphone=(), geolocation=(), payment=(), usb=()')
      next()
    },
  ]
}
