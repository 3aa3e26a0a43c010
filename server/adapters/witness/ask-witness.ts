import {
  addCheckpointBody,
  parseWitnessSize,
  SIZE_TYPE,
  type WitnessAddress,
  withCosignatures,
} from '#shared/log/add-checkpoint.ts'
import { readCosignature, verifyCosignatures } from '#shared/log/cosignature.ts'
import { formatSignatureLine, parseNote } from '#shared/log/signed-note.ts'
import { reasonOf } from '../health.ts'

export interface WitnessQuestion {
  readonly witness: WitnessAddress
  /** The signed note of the new checkpoint, its size, and that which the witness cosigned last. */
  readonly note: string
  readonly size: number
  readonly oldSize: number
  /** That the old one is the beginning of the new one. Requires 1 ≤ old size ≤ new size. */
  readonly proofFrom: (oldSize: number) => Promise<readonly Uint8Array[]>
  readonly timeoutMs?: number
  readonly fetch?: typeof fetch
}

/** What became of a checkpoint at a witness. `at`: the time that its cosignature states. */
export type WitnessOutcome =
  | { readonly kind: 'cosigned'; readonly line: string; readonly at: Date }
  /** It has cosigned a larger one already. */
  | { readonly kind: 'ahead'; readonly size: number }
  | { readonly kind: 'refused' | 'unreachable'; readonly detail: string }

const LARGEST_ANSWER = 16 * 1024

/** Sends a checkpoint to a witness, and once more where it knows another size than we thought. Never throws for what it does. */
export async function askWitness(question: WitnessQuestion): Promise<WitnessOutcome> {
  const first = await send(question, question.oldSize)
  if (first.kind !== 'other-size') return first
  if (first.size > question.size) return { kind: 'ahead', size: first.size }
  const second = await send(question, first.size)
  if (second.kind !== 'other-size') return second
  return { kind: 'refused', detail: 'It stated two sizes in two answers.' }
}

type Sent = WitnessOutcome | { readonly kind: 'other-size'; readonly size: number }

async function send(question: WitnessQuestion, oldSize: number): Promise<Sent> {
  const { witness, note, size } = question
  const timeout = AbortSignal.timeout(question.timeoutMs ?? 10_000)
  try {
    const proof = oldSize === 0 || oldSize === size ? [] : await question.proofFrom(oldSize)
    const response = await (question.fetch ?? fetch)(`${witness.url.replace(/\/+$/, '')}/add-checkpoint`, {
      method: 'POST',
      headers: { 'content-type': 'text/plain; charset=utf-8' },
      body: addCheckpointBody({ oldSize, proof, note }),
      signal: timeout,
      cache: 'no-store',
    })
    const body = await readLimited(response)
    if (body === null) return { kind: 'refused', detail: 'Its answer is longer than any.' }
    if (response.status === 200) return judge(question, body)
    const type = response.headers.get('content-type')?.split(';')[0]?.trim()
    const stated = response.status === 409 && type === SIZE_TYPE ? parseWitnessSize(body) : null
    if (stated !== null) return { kind: 'other-size', size: stated }
    return { kind: 'refused', detail: `It answered with HTTP ${response.status}: ${body.trim().slice(0, 300)}` }
  } catch (error) {
    const detail = timeout.aborted ? 'It did not answer in time.' : `It cannot be reached: ${reasonOf(error)}`
    return { kind: 'unreachable', detail }
  }
}

/** Takes the one good cosignature of the witness out of its answer; others are left. */
function judge({ witness, note }: WitnessQuestion, body: string): WitnessOutcome {
  const none = { kind: 'refused', detail: 'Its answer holds no good cosignature of its key.' } as const
  const joined = parseNote(withCosignatures(note, [body]))
  if (!joined.ok) return none
  const good = verifyCosignatures(joined.value, [witness.key])
  const { name, id } = witness.key
  const line = joined.value.signatures.find((one) => one.name === name && one.id === id)
  const stated = line ? readCosignature(line.signature) : null
  if (!good.ok || good.value.length === 0 || !line || !stated) return none
  return { kind: 'cosigned', line: formatSignatureLine(line), at: new Date(stated.time * 1000) }
}

async function readLimited(response: Response): Promise<string | null> {
  const pieces: Uint8Array[] = []
  let size = 0
  for await (const piece of response.body ?? []) {
    size += piece.length
    if (size > LARGEST_ANSWER) return null
    pieces.push(piece)
  }
  return Buffer.concat(pieces).toString('utf8')
}
