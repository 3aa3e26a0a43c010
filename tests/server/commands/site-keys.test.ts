import { createPublicKey, generateKeyPairSync } from 'node:crypto'
import { createHash } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { createSigningKeys } from '#server/adapters/signing/signing-keys.ts'
import { noteSiteKeys } from '#server/commands/note-site-keys.ts'
import { getSiteKeys } from '#server/store/queries/site-keys.ts'
import { siteKeys } from '#shared/schemas/api/site-keys.ts'
import { makeOffice, makeSealed } from '#tests/support/draws.ts'
import { settableClock, startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-10-02T09:00:00Z'))
let site: TestSite
beforeAll(async () => {
  site = await startTestSite({ clock })
}, 60_000)
afterAll(() => site.close())

const pem = () => generateKeyPairSync('ed25519').privateKey.export({ type: 'pkcs8', format: 'pem' }).toString()

describe('the keys of the site', () => {
  it('are noted with the times from and until which they signed, and can be checked by OpenSSL’s own digest', async () => {
    const [first, second] = [site.config.signingKeyPem, pem()]
    // A key that is older than the notes counts from its first seal.
    await makeSealed(site.services, await makeOffice(site.services, { demo: true }))
    clock.set(new Date('2026-10-05T00:00:00Z'))
    await noteSiteKeys(site.services)
    await noteSiteKeys(site.services)
    expect((await getSiteKeys(site.services)).keys).toMatchObject([{ since: '2026-10-02T09:00:00Z', until: null }])

    clock.set(new Date('2026-11-01T00:00:00Z'))
    const changed = { ...site.services, signing: createSigningKeys(second, [first]) }
    await noteSiteKeys(changed)
    const after = await getSiteKeys(changed)
    expect(after.keys.map(({ fingerprint, since, until }) => [fingerprint, since, until])).toEqual([
      [changed.signing.current.fingerprint, '2026-11-01T00:00:00Z', null],
      [site.services.signing.current.fingerprint, '2026-10-02T09:00:00Z', '2026-11-01T00:00:00Z'],
    ])
    for (const { fingerprint, publicKey } of after.keys) {
      const der = createPublicKey(publicKey).export({ type: 'spki', format: 'der' })
      expect(createHash('sha256').update(der).digest('hex')).toBe(fingerprint)
    }
    // Even a key that is configured no more stays on the list.
    clock.set(new Date('2026-12-01T00:00:00Z'))
    const alone = { ...site.services, signing: createSigningKeys(second, []) }
    await noteSiteKeys(alone)
    expect(siteKeys.parse(await getSiteKeys(alone))).toEqual(after)
    // And one that comes back signs again.
    await noteSiteKeys(site.services)
    expect((await getSiteKeys(site.services)).keys).toMatchObject([
      { fingerprint: site.services.signing.current.fingerprint, until: null },
      { fingerprint: changed.signing.current.fingerprint, until: '2026-12-01T00:00:00Z' },
    ])
  })
  it('are never taken off the list', async () => {
    await expect(site.database.pool.query('delete from site_key')).rejects.toThrow(/stays on its list/)
    await expect(site.database.pool.query(`update site_key set since = now()`)).rejects.toThrow(/stays on its list/)
  })
})
