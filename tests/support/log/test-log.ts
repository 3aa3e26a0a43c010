import { toHex } from '#shared/bytes/hex.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { logOrigin, signCheckpoint, type Checkpoint } from '#shared/log/checkpoint.ts'
import { logProofBytes } from '#shared/log/log-proof.ts'
import { buildLogTree, logLeafHash, type LogTree } from '#shared/merkle/rfc9162.ts'
import { type LogEvent, logLeafBytes } from '#shared/protocol/log-leaf.ts'
import { publicKeyOf, signBytes } from '#shared/protocol/signature.ts'

/** A log in memory, for tests: leaves out of a few words each. */
export class TestLog {
  readonly leaves: string[] = []

  constructor(
    readonly secret: Uint8Array = new Uint8Array(32).fill(7),
    readonly origin = logOrigin('https://ravelin-hall.example'),
  ) {}

  add(draw: string | null, event: LogEvent, digest: string | null = null, organisation = 'larkfield-choir'): number {
    const at = `2026-03-01T10:00:${String(this.leaves.length % 60).padStart(2, '0')}Z`
    const rest = { format: 'evenpenny/1', kind: 'log', note: null, supersedes: null } as const
    this.leaves.push(decodeUtf8(logLeafBytes({ at, digest, draw, event, organisation, ...rest })) ?? '')
    return this.leaves.length - 1
  }

  tree(size = this.leaves.length): LogTree {
    return buildLogTree(
      sha256,
      this.leaves.slice(0, size).map((text) => logLeafHash(sha256, utf8(text))),
    )
  }

  head(size = this.leaves.length): Checkpoint {
    return { origin: this.origin, size, root: Uint8Array.from(this.tree(size).root) }
  }

  note(size = this.leaves.length): string {
    const publicKey = publicKeyOf(this.secret)
    return signCheckpoint(sha256, this.head(size), { publicKey, sign: (m) => signBytes(this.secret, m) })
  }

  /** `log-proof.json` of these entries. */
  proof(indexes: readonly number[], size = this.leaves.length): Uint8Array {
    const tree = this.tree(size)
    return logProofBytes(
      indexes.map((index) => ({ index, text: this.leaves[index] ?? '', path: tree.inclusionProof(index) })),
    )
  }

  /** A log that began with the first `size` leaves of this one, and then said something else. */
  fork(size: number): TestLog {
    const other = new TestLog(this.secret, this.origin)
    other.leaves.push(...this.leaves.slice(0, size))
    other.add('another-story', 'opened', toHex(sha256(utf8(String(size)))))
    return other
  }
}
