// The files under tests/tampering: what each changes, and how a change is made.
import { z } from 'zod'
import { BASES } from '#tests/support/archive/test-draw.ts'

const place = z.array(z.union([z.string(), z.number()]))

/** A change of a parsed record. `flip` changes one bit of hex; `swap` exchanges two places; `bump` adds to a number. */
const objectChange = z.discriminatedUnion('do', [
  z.strictObject({ do: z.literal('set'), at: place, to: z.json() }),
  z.strictObject({ do: z.literal('delete'), at: place }),
  z.strictObject({ do: z.literal('copy'), from: place, at: place }),
  z.strictObject({ do: z.literal('swap'), at: place, with: place }),
  z.strictObject({ do: z.literal('bump'), at: place, by: z.number() }),
  z.strictObject({ do: z.literal('flip'), at: place }),
  z.strictObject({ do: z.literal('append'), at: place, value: z.json() }),
  z.strictObject({ do: z.literal('upper-case'), at: place }),
  z.strictObject({ do: z.literal('beacon-signature'), at: place, which: z.enum(['next-round', 'off-subgroup']) }),
])
export type ObjectChange = z.infer<typeof objectChange>

/** A change of a text. Lines count from 0; `replace` must find what it replaces, and changes the first it finds. */
const textChange = z.discriminatedUnion('do', [
  z.strictObject({ do: z.literal('replace'), find: z.string(), with: z.string() }),
  z.strictObject({ do: z.literal('replace-all'), find: z.string(), with: z.string() }),
  z.strictObject({ do: z.literal('append'), text: z.string() }),
  z.strictObject({ do: z.literal('prepend'), text: z.string() }),
  z.strictObject({ do: z.literal('cut-end'), characters: z.number() }),
  z.strictObject({ do: z.literal('swap-lines'), line: z.number(), with: z.number() }),
  z.strictObject({ do: z.literal('delete-line'), line: z.number() }),
  z.strictObject({ do: z.literal('repeat-line'), line: z.number() }),
  z.strictObject({ do: z.literal('pattern'), find: z.string(), with: z.string() }),
])
export type TextChange = z.infer<typeof textChange>

const header = z.strictObject({
  flags: z.number().optional(),
  method: z.number().optional(),
  time: z.number().optional(),
  crc: z.number().optional(),
  unpacked: z.number().optional(),
  name: z.string().optional(),
})

const stages = z.strictObject({
  publicKey: z.string().optional(),
  terms: z.array(textChange).optional(),
  list: z.array(textChange).optional(),
  seal: z.array(objectChange).optional(),
  sealText: z.array(textChange).optional(),
  transcript: z.array(textChange).optional(),
  result: z.array(objectChange).optional(),
  resultText: z.array(textChange).optional(),
  entries: z.array(textChange).optional(),
  labels: z.array(textChange).optional(),
  sums: z.array(textChange).optional(),
  receipt: z.array(objectChange).optional(),
  receiptText: z.array(textChange).optional(),
  /** Gives the short proof of the receipt in its place, before the changes of `receipt`. */
  shortProof: z.boolean().optional(),
  signature: z
    .strictObject({
      record: z.enum(['seal', 'result', 'checkpoint', 'replaced-1', 'replaced-2']),
      change: z.enum(['flip', 'other-key', 'other-record', 'longer', 'shorter', 'add-order', 'small-order']),
    })
    .optional(),
  /** The leaves of the site's log, a line each, before they are hashed and signed. */
  logLeaves: z.array(textChange).optional(),
  /** The checkpoint's lines before they are signed, the note behind its signing, and the proofs. */
  checkpointText: z.array(textChange).optional(),
  checkpoint: z.array(textChange).optional(),
  logProof: z.array(textChange).optional(),
  /** Numbers of the entries that are proven, in place of the draw's: 1, 3, 4 and 6. */
  logEntries: z.array(z.number()).optional(),
  /** The timestamp of the seal: how long before the draw in seconds, over another digest, and its bytes. */
  stamp: z
    .strictObject({
      beforeDraw: z.number().optional(),
      imprint: z.literal('other').optional(),
      /** Changes one bit of what is named. */
      flip: z.enum(['signature', 'content', 'attributes', 'certificate', 'status']).optional(),
      /** Answers as an authority that gives none, or with other bytes. */
      bytes: z
        .enum(['refused', 'empty', 'cut', 'longer', 'indefinite', 'nested', 'large', 'by-a-stranger', 'unnamed'])
        .optional(),
    })
    .optional(),
  /** Other bytes in the place of the timestamp, hex. */
  stampBytes: z.string().optional(),
  /** The checkpoint that a witness cosigned: its note, its proof, the entries proven in place of the seal's, 4, its time. */
  witnessed: z.array(textChange).optional(),
  witnessedProof: z.array(textChange).optional(),
  witnessedEntries: z.array(z.number()).optional(),
  witnessedBeforeDraw: z.number().optional(),
  /** Replaced seals by their numbers, before the chain is made, and the record of them behind it. */
  replacedSeals: z.partialRecord(z.enum(['1', '2']), z.array(objectChange)).optional(),
  replaced: z.array(textChange).optional(),
  /** Later members that the archive does without. */
  without: z.array(z.string()).optional(),
  /** Changes the bytes of members behind SHA256SUMS, as damage does; null takes one out. */
  damage: z.record(z.string(), z.array(textChange).nullable()).optional(),
  /** Members that the format does not know. */
  add: z.record(z.string(), z.string()).optional(),
  zip: z
    .strictObject({
      member: z.string().optional(),
      name: z.string().optional(),
      both: header.optional(),
      local: header.optional(),
      directory: header.optional(),
      attributes: z.number().optional(),
      before: z.string().optional(),
      memberComment: z.string().optional(),
      repeatAs: z.string().optional(),
      behindPacked: z.string().optional(),
      comment: z.string().optional(),
      leading: z.string().optional(),
      trailing: z.string().optional(),
      beforeDirectory: z.string().optional(),
      count: z.number().optional(),
    })
    .optional(),
})

/** One file under tests/tampering. */
export const mutationFile = z.strictObject({
  desc: z.string().min(10),
  base: z.enum(BASES),
  change: stages,
  /** Options of the check besides --test-beacon. */
  key: z.string().optional(),
  withoutTestBeacon: z.boolean().optional(),
  giveReceipt: z.boolean().optional(),
  /** Gives the key of the witness of the tests. */
  giveWitness: z.boolean().optional(),
  step: z.number().int().min(1).max(12),
  code: z.string(),
})
export type Mutation = z.infer<typeof mutationFile>
