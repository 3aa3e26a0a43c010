import type { MembersSource } from '#shared/archive/members-source.ts'
import { readMember } from '#shared/archive/members-source.ts'
import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { openCheckpoint } from '#shared/log/checkpoint.ts'
import type { CheckReport } from '#shared/protocol/check/check-archive.ts'
import { asStepFailure, type GivenReceipt, MEMBER_LIMITS } from '#shared/protocol/check/state.ts'
import { memberLines } from '#shared/protocol/check/member-lines.ts'
import { examineReceipt } from '#shared/protocol/check/receipts-step.ts'
import type { CheckTools } from '#shared/protocol/check/tools.ts'
import { parseLabels } from '#shared/protocol/labels.ts'
import type { ResultPick } from '#shared/protocol/result.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { decodePem } from '#shared/protocol/signature.ts'
import { parseTranscriptLine } from '#shared/protocol/transcript.ts'
import type { Award, CoinLine } from '#shared/schemas/api/public.ts'
import type { CheckedDraw, PickRow, ReceiptFinding } from '../messages.ts'
import type { HashEngine } from './fast-tools.ts'
import { type LogWatch, watchLog } from './watch-log.ts'

export type HeldReport = Extract<CheckReport, { readonly ok: true }>

/** Picks that go to the page at once. */
export const PICK_PAGE = 20

/** An archive that has held, open for questions: its picks, their walks, and receipts held against its seal. */
export class CheckedArchive {
  private labels: ReadonlyMap<number, string> | null = null

  constructor(
    private readonly report: HeldReport,
    private readonly open: () => Promise<MembersSource>,
    private readonly tools: CheckTools,
  ) {}

  summary(engine: HashEngine): CheckedDraw {
    const { seal, result } = this.report
    return {
      title: seal.title,
      organisation: seal.organisation.name,
      drawnAt: result.drawnAt,
      entrants: seal.entries.count,
      tickets: seal.entries.tickets,
      pickCount: result.picks.length,
      engine,
    }
  }

  /** Rows of the picks from one on, a page of them. */
  async picks(from: number): Promise<readonly PickRow[]> {
    const { seal, result } = this.report
    this.labels ??= await readLabels(await this.open())
    const labels = this.labels
    return result.picks.slice(from, from + PICK_PAGE).map((pick) => ({
      pick: pick.pick,
      award: awardOf(pick, seal),
      leaf: pick.leaf,
      label: labels.get(pick.leaf) ?? null,
      remaining: pick.remaining,
    }))
  }

  /** The coins of one pick, as the checked transcript has them. */
  async walk(pick: number): Promise<readonly CoinLine[]> {
    const source = await this.open()
    let at = 0
    for await (const line of memberLines(source.open('transcript.jsonl'), NO_DIGEST)) {
      if (at++ === pick) return unwrap(parseTranscriptLine(line.subarray(0, -1))).coins.map(([...coin]) => coin)
    }
    throw new RangeError(`The draw has no pick ${pick}.`)
  }

  /** Compares the site's log with the archive's head of it and with the one remembered. */
  async watchLog(remembered: string | null): Promise<LogWatch> {
    const source = await this.open()
    const read = async (name: 'site-key.pem' | 'checkpoint.txt') =>
      source.names.includes(name) ? await readMember(source, name, MEMBER_LIMITS[name]) : null
    const publicKey = decodePem((await read('site-key.pem')) ?? new Uint8Array(0))
    if (publicKey === null) throw new RangeError('The archive has no key.')
    const { sha256 } = this.tools
    const note = await read('checkpoint.txt')
    const opened = note === null ? null : openCheckpoint(sha256, note, { publicKeys: [publicKey] })
    const archived =
      note !== null && opened?.ok ? { checkpoint: opened.value.checkpoint, note: decodeUtf8(note) ?? '' } : null
    return watchLog({ sha256, publicKey, archived, remembered })
  }

  receipt(given: GivenReceipt): ReceiptFinding {
    try {
      const { seal, verdict } = this.report
      return { ok: true, found: examineReceipt(this.tools.sha256, given, seal, verdict.sealDigest) }
    } catch (error) {
      const failure = asStepFailure(error)
      if (failure === null) throw error
      return { ok: false, at: failure.at, message: failure.message, code: failure.code }
    }
  }
}

const NO_DIGEST = { update: () => {}, digest: () => new Uint8Array(0) }

async function readLabels(source: MembersSource): Promise<ReadonlyMap<number, string>> {
  const bytes = await readMember(source, 'labels.jsonl', MEMBER_LIMITS['labels.jsonl'])
  return new Map(unwrap(parseLabels(bytes ?? new Uint8Array(0))).map(({ leaf, label }) => [leaf, label]))
}

function awardOf({ award }: ResultPick, seal: Seal): Award {
  if ('reserve' in award) return { kind: 'reserve', reserve: award.reserve }
  const index = seal.prizes.findIndex(({ id }) => id === award.prize)
  const prize = seal.prizes[index]
  return {
    kind: 'prize',
    prize: award.prize,
    name: prize?.name ?? award.prize,
    item: award.item,
    of: prize?.quantity ?? award.item,
    position: index + 1,
  }
}
