import { mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { eq } from 'drizzle-orm'
import { simpleParser } from 'mailparser'
import { checkPath } from '#server/cli/check/run-check.ts'
import { LockedArchives } from '#server/http/files/locked-archives.ts'
import { proofZip } from '#server/http/files/proof-zip.ts'
import { labelsOf } from '#server/store/queries/proof-members.ts'
import { archive } from '#server/store/schema/result.ts'
import type { CheckOptions, GivenReceipt } from '#shared/protocol/check/state.ts'
import type { CheckReport } from '#shared/protocol/check/check-archive.ts'
import type { TestSite } from './site.ts'

/** The receipts in the mails that the fake server got, oldest first. */
export async function receiptsOf(site: TestSite, to = ''): Promise<GivenReceipt[]> {
  const receipts: GivenReceipt[] = []
  for (const mail of site.mail.store.list(to)) {
    const { attachments } = await simpleParser(site.mail.store.raw(mail))
    for (const { content } of attachments) receipts.push({ name: 'receipt.json', bytes: new Uint8Array(content) })
  }
  return receipts
}

/**
 * Puts the public archive of a draw together as the site does, and checks it with the product's own check. `keep`: where to
 * leave the zip besides.
 */
export async function checkPublicArchive(
  site: TestSite,
  drawId: string,
  receipts: readonly GivenReceipt[] = [],
  options: CheckOptions & { readonly keep?: string } = {},
): Promise<CheckReport> {
  const [row] = await site.services.db.select().from(archive).where(eq(archive.drawId, drawId))
  if (!row) throw new Error('The draw has no archive.')
  const locked = new LockedArchives(site.services.store)
  const folder = await mkdtemp(join(tmpdir(), 'evenpenny-public-'))
  try {
    const path = join(folder, 'proof.zip')
    await locked.use(row, async (zip) => {
      const labels = await labelsOf(site.services.db, drawId)
      const { chunks, size } = await proofZip(zip, new Map(Object.entries(row.members)), labels)
      const pieces: Uint8Array[] = []
      for await (const chunk of chunks) pieces.push(chunk)
      const bytes = Buffer.concat(pieces)
      if (bytes.length !== size) throw new Error('The archive has not the size that was announced.')
      await writeFile(path, bytes)
      if (options.keep) await writeFile(options.keep, bytes)
    })
    return await checkPath(path, () => undefined, {
      allowDevelopmentChain: true,
      expectedKey: site.services.signing.current.fingerprint,
      receipts,
      ...options,
    })
  } finally {
    await locked.close()
    await rm(folder, { recursive: true, force: true })
  }
}
