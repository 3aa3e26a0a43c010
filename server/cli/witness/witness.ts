import { utf8 } from '#shared/bytes/bytes.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { equalBytes } from '#shared/bytes/bytes.ts'
import { type AddCheckpoint, parseAddCheckpoint, SIZE_TYPE } from '#shared/log/add-checkpoint.ts'
import { type Checkpoint, openCheckpoint, parseCheckpoint } from '#shared/log/checkpoint.ts'
import { cosign } from '#shared/log/cosignature.ts'
import { formatSignatureLine, type NoteKey } from '#shared/log/signed-note.ts'
import { verifyLogConsistency } from '#shared/merkle/rfc9162.ts'
import type { Seen, StateFile } from './state-file.ts'

export interface WitnessParts {
  readonly sha256: Sha256
  /** The witness's own key, of type 4, and what signs with it. */
  readonly key: NoteKey
  readonly sign: (message: Uint8Array) => Uint8Array
  /** The keys of the logs that are followed; a log may have several. Their names are the logs' origins. */
  readonly logs: readonly NoteKey[]
  readonly state: StateFile
  /** Seconds since 1970. */
  readonly now: () => number
  /** Told of every checkpoint that would have been a fork: it is proof against its log. */
  readonly onFork?: (note: string, words: string) => void
}

export interface WitnessAnswer {
  readonly status: 200 | 400 | 403 | 404 | 409 | 422
  readonly type: string
  readonly body: string
}

const words = (status: WitnessAnswer['status'], body: string): WitnessAnswer => ({
  status,
  type: 'text/plain; charset=utf-8',
  body: `${body}\n`,
})

/**
 * An outside witness of logs (C2SP tlog-witness): cosigns a checkpoint only where it holds all that the witness cosigned
 * before. One request after the other, so that no answer can wind the memory back.
 */
export class Witness {
  readonly #parts: WitnessParts
  #last: Promise<unknown> = Promise.resolve()

  constructor(parts: WitnessParts) {
    this.#parts = parts
  }

  /** The answer to the body of an `add-checkpoint` request. */
  addCheckpoint(body: Uint8Array): Promise<WitnessAnswer> {
    const answer = this.#last.then(() => this.#answer(body))
    this.#last = answer.catch(() => undefined)
    return answer
  }

  async #answer(body: Uint8Array): Promise<WitnessAnswer> {
    const request = parseAddCheckpoint(body)
    if (!request.ok) return words(400, request.error.message)
    const { note } = request.value
    const parsed = parseCheckpoint(utf8(note))
    if (!parsed.ok) return words(400, parsed.error.message)
    const { origin } = parsed.value.checkpoint
    const keys = this.#parts.logs.filter(({ name }) => name === origin)
    if (keys.length === 0) return words(404, 'This log is not followed here.')
    const publicKeys = keys.map(({ publicKey }) => publicKey)
    const opened = openCheckpoint(this.#parts.sha256, utf8(note), { publicKeys, origin })
    if (!opened.ok) return words(403, opened.error.message)
    return this.#judge(request.value, opened.value.checkpoint, opened.value.note.text)
  }

  async #judge(request: AddCheckpoint, now: Checkpoint, text: string): Promise<WitnessAnswer> {
    const { state, key, sign } = this.#parts
    const seen: Seen = state.get(now.origin) ?? { size: 0, root: new Uint8Array(0) }
    if (request.oldSize > now.size) return words(400, 'The old size is larger than that of the checkpoint.')
    if (request.oldSize !== seen.size) return { status: 409, type: SIZE_TYPE, body: `${seen.size}\n` }
    const problem = this.#problem(request, seen, now)
    if (problem !== null) {
      this.#parts.onFork?.(request.note, problem.body.trimEnd())
      return problem
    }
    await state.put(now.origin, { size: now.size, root: now.root })
    return {
      status: 200,
      type: 'text/plain; charset=utf-8',
      body: formatSignatureLine(cosign(text, this.#parts.now(), key, sign)),
    }
  }

  /** Why the checkpoint does not hold what was cosigned before; null where it does. */
  #problem(request: AddCheckpoint, seen: Seen, now: Checkpoint): WitnessAnswer | null {
    const { proof } = request
    if (seen.size === 0) return proof.length === 0 ? null : words(422, 'A first checkpoint has no proof.')
    if (seen.size === now.size) {
      if (!equalBytes(seen.root, now.root))
        return words(409, 'A checkpoint of this size with another root was cosigned.')
      return proof.length === 0 ? null : words(422, 'For the same size there is nothing to prove.')
    }
    const sizes = { first: seen.size, second: now.size, firstRoot: seen.root, secondRoot: now.root }
    return verifyLogConsistency(this.#parts.sha256, { ...sizes, proof })
      ? null
      : words(422, 'The proof does not show that the log only grew.')
  }
}
