import { parseCanonicalJson, type CanonicalJsonCode } from '../bytes/canonical-json.ts'
import { utf8 } from '../bytes/bytes.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import type { Walk, WalkCoin } from '../sampling/walk.ts'
import { splitLines, type LinesCode } from './json-lines.ts'
import { MAX_ENTRANTS, MAX_PICKS, MAX_TICKETS } from './limits.ts'
import { list, members, oneOf, readShape, refuse, whole, type ShapeCode } from './shape.ts'

/** `transcript.jsonl` (PROTOCOL section 8): a line for each pick, with every coin that it passed, root first. */

/** What a line of the transcript says. */
export interface TranscriptPick {
  readonly pick: number
  readonly leaf: number
  readonly coins: readonly WalkCoin[]
}

/** Why a transcript is refused. */
export type TranscriptCode = ShapeCode | CanonicalJsonCode | LinesCode | 'pick-order' | 'too-many-picks'

/** A pick's line: JCS and a line feed. Spelt out, because the members stand in JCS order and hold only ASCII. */
export function transcriptLine(pick: Pick<Walk, 'coins' | 'leaf'> & { readonly pick: number }): string {
  const coins = pick.coins.map(([left, right, flips, fall]) => `[${left},${right},"${flips}","${fall}"]`)
  return `{"coins":[${coins.join(',')}],"leaf":${pick.leaf},"pick":${pick.pick}}\n`
}

/** The file's bytes. */
export function transcriptBytes(picks: Iterable<Pick<Walk, 'coins' | 'leaf'> & { readonly pick: number }>): Uint8Array {
  const lines: string[] = []
  for (const pick of picks) lines.push(transcriptLine(pick))
  return utf8(lines.join(''))
}

/** SHA-256 of the file's bytes. */
export function transcriptDigest(sha256: Sha256, bytes: Uint8Array): Uint8Array {
  return sha256(bytes)
}

/** Parses one line, given without its line feed. */
export function parseTranscriptLine(line: Uint8Array): Result<TranscriptPick, Failure<ShapeCode | CanonicalJsonCode>> {
  const json = parseCanonicalJson(line)
  if (!json.ok) return json
  return readShape<TranscriptPick>(() => {
    const m = members(json.value, ['coins', 'leaf', 'pick'], '')
    return {
      pick: whole(m.pick, 0, MAX_PICKS - 1, 'pick'),
      leaf: whole(m.leaf, 0, MAX_ENTRANTS - 1, 'leaf'),
      coins: list(m.coins, 'coins').map((coin, i) => readCoin(coin, `coins[${i}]`)),
    }
  })
}

/** Parses a whole transcript: picks from 0 in order. Whether the coins fell so is for the walk to say. */
export function parseTranscript(bytes: Uint8Array): Result<readonly TranscriptPick[], Failure<TranscriptCode>> {
  const lines = splitLines(bytes)
  if (!lines.ok) return lines
  if (lines.value.length > MAX_PICKS) return fail('too-many-picks', '', `A draw has at most ${MAX_PICKS} picks.`)
  const picks: TranscriptPick[] = []
  for (const [i, line] of lines.value.entries()) {
    const pick = parseTranscriptLine(line)
    const at = `line ${i + 1}`
    if (!pick.ok) return fail(pick.error.code, `${at} ${pick.error.at}`.trimEnd(), pick.error.message)
    if (pick.value.pick !== i) return fail('pick-order', `${at} pick`, `Pick ${i} was expected here.`)
    picks.push(pick.value)
  }
  return ok(picks)
}

function readCoin(value: unknown, at: string): WalkCoin {
  const coin = list(value, at)
  if (coin.length !== 4) refuse('value-wrong', at, 'A coin has left, right, flips and fall.')
  const flips = coin[2]
  if (typeof flips !== 'string' || !/^[01]*$/.test(flips)) {
    refuse('text-wrong', `${at}[2]`, 'Flips are written as 0 and 1.')
  }
  return [
    whole(coin[0], 0, MAX_TICKETS, `${at}[0]`),
    whole(coin[1], 0, MAX_TICKETS, `${at}[1]`),
    flips as string,
    oneOf(coin[3], ['H', 'T'], `${at}[3]`),
  ]
}
