import { mkdtemp, open, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { eq } from 'drizzle-orm'
import { CHECKING_TEXT } from '#shared/archive/checking-text.ts'
import { type LockedContents, lockedMembers, sumMember } from '#shared/archive/proof-archive.ts'
import { writeZip } from '#shared/archive/zip-writer.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { readCheckFiles } from '#server/adapters/archive/check-files.ts'
import { createSha256 } from '#server/adapters/archive/check-tools.ts'
import { deflateWithZlib } from '#server/adapters/archive/zlib-codec.ts'
import { sourceOfFile } from '#server/adapters/object-store/put-source.ts'
import type { Services } from '#server/services.ts'
import { entriesOf, transcriptOf } from '#server/store/queries/proof-members.ts'
import { archive, result } from '#server/store/schema/result.ts'
import { draw } from '#server/store/schema/draw.ts'
import { seal } from '#server/store/schema/seal.ts'
import type { AfterWrite } from './crash-points.ts'
import { laterMembers } from './later-members.ts'

/**
 * Puts the locked half of a draw's proof (all but labels.jsonl and SHA256SUMS) into the object store, under a lock where
 * the bucket has one, has it read back and compared, and notes it. The zip is the same bytes every time and its name is
 * their digest, so that a second run finds the first one's object.
 */
export async function storeArchive(
  services: Services,
  afterWrite: AfterWrite,
  input: { readonly draw: string },
): Promise<'stored' | 'there-already' | 'nothing'> {
  const { db, clock } = services
  const [settled] = await db
    .select({ result, seal, slug: draw.slug })
    .from(result)
    .innerJoin(seal, eq(seal.id, result.sealId))
    .innerJoin(draw, eq(draw.id, result.drawId))
    .where(eq(result.drawId, input.draw))
  if (!settled) return 'nothing'
  const [noted] = await db.select({ key: archive.key }).from(archive).where(eq(archive.drawId, input.draw))
  if (noted) return 'there-already'
  const contents = await contentsOf(services, input.draw, settled)
  const members = lockedMembers(contents)
  const digests: Record<string, string> = {}
  for (const member of members) digests[member.name] = (await sumMember(member, createSha256())).digest
  const folder = await mkdtemp(join(tmpdir(), 'evenpenny-archive-'))
  try {
    const path = join(folder, 'proof.zip')
    const file = await open(path, 'wx', 0o600)
    try {
      for await (const chunk of writeZip(members, { deflate: deflateWithZlib })) await file.writeFile(chunk)
    } finally {
      await file.close()
    }
    const source = await sourceOfFile(path)
    const key = `proofs/${settled.slug}/${source.sha256}.zip`
    const stored = await services.store.put(key, source, 'application/zip')
    afterWrite('archive-stored')
    await db
      .insert(archive)
      .values({
        drawId: input.draw,
        key,
        bytes: source.size,
        sha256: source.sha256,
        members: digests,
        lockedUntil: stored.lockedUntil,
        verifiedAt: clock.now(),
        createdAt: clock.now(),
      })
      .onConflictDoNothing()
    afterWrite('archive-noted')
    return 'stored'
  } finally {
    await rm(folder, { recursive: true, force: true })
  }
}

async function contentsOf(
  services: Services,
  drawId: string,
  settled: { readonly result: typeof result.$inferSelect; readonly seal: typeof seal.$inferSelect },
): Promise<LockedContents> {
  const key = services.signing.find(settled.seal.keyFingerprint)
  if (!key) throw new Error(`The signing key ${settled.seal.keyFingerprint} is not configured.`)
  return {
    'CHECKING.txt': utf8(CHECKING_TEXT),
    'seal.json': settled.seal.bytes,
    'seal.sig': settled.seal.signature,
    'terms.txt': utf8(settled.seal.terms),
    'entries.csv': () => entriesOf(services.db, settled.seal.id),
    'result.json': settled.result.bytes,
    'result.sig': settled.result.signature,
    'transcript.jsonl': () => transcriptOf(services.db, drawId),
    'site-key.pem': utf8(key.publicKeyPem),
    ...(await readCheckFiles()),
    ...(await laterMembers(services, drawId, settled)),
  }
}
