import { desc } from 'drizzle-orm'
import { utf8 } from '#shared/bytes/bytes.ts'
import { logKey, logOrigin } from '#shared/log/checkpoint.ts'
import { formatVkey } from '#shared/log/signed-note.ts'
import { decodePem } from '#shared/protocol/signature.ts'
import type { SiteKeys } from '#shared/schemas/api/site-keys.ts'
import type { Services } from '#server/services.ts'
import { siteKey } from '#server/store/schema/record.ts'
import { instantOf, instantOrNull } from '#server/time/instants.ts'

/** Every key that the site has signed with, the present one first. */
export async function getSiteKeys({ db, sha256, site }: Pick<Services, 'db' | 'sha256' | 'site'>): Promise<SiteKeys> {
  const log = logOrigin(site.origin)
  const rows = await db.select().from(siteKey).orderBy(desc(siteKey.since))
  const keys = rows.map(({ fingerprint, publicKeyPem, since, until }) => {
    const publicKey = decodePem(utf8(publicKeyPem))
    if (!publicKey) throw new Error(`The noted key ${fingerprint} is none.`)
    return {
      fingerprint,
      publicKey: publicKeyPem,
      since: instantOf(since),
      until: instantOrNull(until),
      logKey: formatVkey(logKey(sha256, log, publicKey)),
    }
  })
  const current = keys.filter(({ until }) => until === null)
  return { log, keys: [...current, ...keys.filter(({ until }) => until !== null)] }
}
