import { gunzipSync } from 'node:zlib'
import { describe, expect, it } from 'vitest'
import { newNonce } from '#server/http/middleware/security-headers.ts'
import { KeptPage } from '#server/http/pages/kept-page.ts'

const made = newNonce()
const html = (nonce: string) =>
  `<html><script nonce="${nonce}">1</script>${'<p>The first prize went to ticket 17.</p>'.repeat(500)}<script nonce="${nonce}">é</script></html>`
const page = new KeptPage(
  200,
  [['Content-Security-Policy', `script-src 'nonce-${made}'`]],
  Buffer.from(html(made)),
  made,
)

describe('KeptPage', () => {
  it('puts the new nonce into every place, and nothing else changes', () => {
    const nonce = newNonce()
    expect(page.plain(nonce).toString()).toBe(html(nonce))
    expect(page.headers(nonce)).toEqual(['Content-Security-Policy', `script-src 'nonce-${nonce}'`])
  })

  it('never shows the nonce that it was made with', () => {
    const nonce = newNonce()
    expect(page.plain(nonce).includes(made)).toBe(false)
    expect(gunzipSync(page.gzip(nonce)).includes(made)).toBe(false)
  })

  it('makes gzip that zlib, which checks its CRC and length, unpacks to the same bytes', () => {
    for (const nonce of [newNonce(), newNonce()]) {
      const packed = page.gzip(nonce)
      expect(gunzipSync(packed).toString()).toBe(html(nonce))
      expect(packed.length).toBeLessThan(html(nonce).length / 10)
    }
  })

  it('packs pages that begin or end with the nonce, or have none', () => {
    const nonce = newNonce()
    for (const form of [`${made}-end`, `start-${made}`, `${made}${made}`, 'none']) {
      const kept = new KeptPage(200, [], Buffer.from(form), made)
      expect(gunzipSync(kept.gzip(nonce)).toString()).toBe(form.replaceAll(made, nonce))
    }
  })
})
