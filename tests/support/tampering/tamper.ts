import { sha256 } from '#server/adapters/hash/sha256.ts'
import { deflateRawSync } from 'node:zlib'
import { decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { type Receipt, shortProof } from '#shared/protocol/receipt.ts'
import { signBytes } from '#shared/protocol/signature.ts'
import { type Stages, testArchive } from '#tests/support/archive/test-draw.ts'
import { rawZip, type RawZipEntry } from '#tests/support/archive/zip-patch.ts'
import { changeStamp } from '#tests/support/tampering/change-stamp.ts'
import { changeObject, changeText } from '#tests/support/tampering/changes.ts'
import type { Mutation, ObjectChange, TextChange } from '#tests/support/tampering/mutation.ts'

export interface TamperedArchive {
  readonly zip: Uint8Array
  readonly receipt: Uint8Array
}

/** Builds the archive of a mutation: everything that is not its target is hashed, signed and summed anew. */
export async function tamper({ base, change }: Pick<Mutation, 'base' | 'change'>): Promise<TamperedArchive> {
  const { publicKey, signature, damage, add, zip, shortProof: short } = change
  const texts = (changes: readonly TextChange[] | undefined) => (text: string) =>
    (changes ?? []).reduce(changeText, text)
  const objects = (changes: readonly ObjectChange[] | undefined) => (record: unknown) => {
    for (const one of changes ?? []) changeObject(record, one)
    return record
  }
  const stages: Stages = {
    publicKey: (key) => (publicKey === undefined ? key : hexBytes(publicKey, 32)),
    terms: texts(change.terms),
    list: texts(change.list),
    seal: objects(change.seal),
    sealText: texts(change.sealText),
    transcript: texts(change.transcript),
    result: objects(change.result),
    resultText: texts(change.resultText),
    entries: texts(change.entries),
    labels: texts(change.labels),
    sums: texts(change.sums),
    logLeaves: texts(change.logLeaves),
    checkpointText: texts(change.checkpointText),
    checkpoint: texts(change.checkpoint),
    logEntries: (own) => change.logEntries ?? own,
    logProof: texts(change.logProof),
    hasLater: (name) => !change.without?.includes(name),
    stampTime: (seconds) =>
      change.stamp?.beforeDraw === undefined ? seconds : seconds + 3598 - change.stamp.beforeDraw,
    stampImprint: (digest) => (change.stamp?.imprint === undefined ? digest : sha256(digest)),
    stamp: (response) =>
      change.stampBytes === undefined ? changeStamp(change.stamp ?? {}, response) : hexBytes(change.stampBytes),
    witnessed: texts(change.witnessed),
    witnessedProof: texts(change.witnessedProof),
    witnessedEntries: (own) => change.witnessedEntries ?? own,
    witnessTime: (seconds) =>
      change.witnessedBeforeDraw === undefined ? seconds : seconds + 3000 - change.witnessedBeforeDraw,
    replacedSeal: (seal, number) => objects(change.replacedSeals?.[number === 1 ? '1' : '2'])(seal),
    replaced: texts(change.replaced),
    receipt: (receipt) => objects(change.receipt)(short ? shortProof(sha256, receipt as Receipt) : receipt),
    receiptText: texts(change.receiptText),
    signature: (record, good, message) =>
      signature?.record === record ? changeSignature(signature.change, good, message) : good,
    extraMembers: () => Object.entries(add ?? {}).map(([name, text]) => [name, utf8(text)] as const),
    member: (name, bytes) => {
      const changes = damage?.[name]
      if (changes === undefined) return bytes
      return changes === null ? null : utf8(texts(changes)(decodeUtf8(bytes) ?? ''))
    },
  }
  const { members, receipt } = await testArchive(base, stages)
  return { zip: bendZip(members, zip ?? {}), receipt }
}

const ORDER = 2n ** 252n + 27742317777372353535851937790883648493n

type SignatureChange = NonNullable<Mutation['change']['signature']>['change']

function changeSignature(change: SignatureChange, good: Uint8Array, message: Uint8Array): Uint8Array {
  const bytes = Uint8Array.from(good)
  switch (change) {
    case 'flip':
      bytes[10] = (bytes[10] ?? 0) ^ 1
      return bytes
    case 'other-key':
      return signBytes(new Uint8Array(32).fill(7), message)
    case 'other-record':
      return signBytes(new Uint8Array(32).fill(7), utf8('something else'))
    case 'longer':
      return new Uint8Array([...bytes, 0])
    case 'shorter':
      return bytes.subarray(0, 63)
    case 'add-order': {
      // The same signature with S + L in place of S, which RFC 8032 section 5.1.7 refuses.
      const s = BigInt(`0x${toHex(bytes.slice(32).reverse())}`) + ORDER
      bytes.set(hexBytes(s.toString(16).padStart(64, '0'), 32).reverse(), 32)
      return bytes
    }
    case 'small-order': {
      // R the neutral point, S zero: under the neutral point as key this fits every message.
      bytes.fill(0)
      bytes[0] = 1
      return bytes
    }
  }
}

function bendZip(
  members: readonly (readonly [name: string, bytes: Uint8Array])[],
  bend: NonNullable<Mutation['change']['zip']>,
): Uint8Array {
  const bytes = (text: string) => new Uint8Array(Buffer.from(text, 'latin1'))
  const entries = members.map(([name, content]): RawZipEntry => {
    const entry: RawZipEntry = { name, bytes: content, method: name.endsWith('.sig') ? 0 : 8 }
    if (name !== bend.member) return entry
    const packed = new Uint8Array(deflateRawSync(content))
    return {
      ...entry,
      name: bend.name ?? name,
      ...(bend.attributes === undefined ? {} : { attributes: bend.attributes }),
      ...(bend.memberComment === undefined ? {} : { comment: bend.memberComment }),
      ...(bend.before === undefined ? {} : { before: bytes(bend.before) }),
      ...(bend.behindPacked === undefined ? {} : { packed: new Uint8Array([...packed, ...bytes(bend.behindPacked)]) }),
      local: defined({ ...bend.both, ...bend.local }),
      directory: defined({ ...bend.both, ...bend.directory }),
    }
  })
  const repeated = members.find(([name]) => name === bend.member)
  if (bend.repeatAs !== undefined && repeated) entries.push({ name: bend.repeatAs, bytes: repeated[1] })
  return rawZip(entries, {
    ...(bend.comment === undefined ? {} : { comment: bend.comment }),
    ...(bend.count === undefined ? {} : { count: bend.count }),
    ...(bend.leading === undefined ? {} : { leading: bytes(bend.leading) }),
    ...(bend.trailing === undefined ? {} : { trailing: bytes(bend.trailing) }),
    ...(bend.beforeDirectory === undefined ? {} : { beforeDirectory: bytes(bend.beforeDirectory) }),
  })
}

type Defined<T> = { [K in keyof T]?: Exclude<T[K], undefined> }

function defined<T extends object>(record: T): Defined<T> {
  return Object.fromEntries(Object.entries(record).filter(([, value]) => value !== undefined)) as Defined<T>
}
