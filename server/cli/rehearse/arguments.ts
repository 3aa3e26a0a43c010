import { parseArgs } from 'node:util'
import { MAX_PICKS } from '#shared/protocol/limits.ts'
import type { WalkRule } from '#shared/sampling/walk.ts'

export const REHEARSE_USAGE = `Usage: npm run rehearse -- --entrants FILE.csv --prizes 1,2,10 --out proof.zip [options]

  --entrants FILE.csv   columns name and tickets; where present email, phone, numbers and label
  --prizes 1,2,10       how many there are of each prize, in the order in which they are drawn
  --out proof.zip       where to write the proof archive; nothing is written over
  --reserves 5          how many reserves to draw behind the prizes; none where this is left out
  --rule RULE           one-prize-each (as without it) or every-ticket
  --receipts FOLDER     also writes a receipt for each entrant into a new folder`

/** The command was used in a way that it does not understand; the message is a whole sentence. */
export class UsageError extends Error {}

export interface RehearseArguments {
  readonly entrants: string
  readonly prizes: readonly number[]
  readonly reserves: number
  readonly rule: WalkRule
  readonly out: string
  readonly receipts: string | null
}

/** Reads the command line of `npm run rehearse`. Throws UsageError. */
export function readRehearseArguments(args: readonly string[]): RehearseArguments {
  const values = parse(args)
  const entrants = required(values.entrants, '--entrants FILE.csv')
  const prizes = required(values.prizes, '--prizes 1,2,10')
    .split(',')
    .map((part) => whole(part, 1, '--prizes'))
  const reserves = values.reserves === undefined ? 0 : whole(values.reserves, 0, '--reserves')
  const picks = prizes.reduce((sum, quantity) => sum + quantity, reserves)
  if (picks > MAX_PICKS) throw new UsageError(`These are ${picks} picks; a draw has at most ${MAX_PICKS}.`)
  const rule = values.rule ?? 'one-prize-each'
  if (rule !== 'one-prize-each' && rule !== 'every-ticket') {
    throw new UsageError('--rule is one-prize-each or every-ticket.')
  }
  return {
    entrants,
    prizes,
    reserves,
    rule,
    out: required(values.out, '--out proof.zip'),
    receipts: values.receipts ?? null,
  }
}

function parse(args: readonly string[]) {
  const text = { type: 'string' } as const
  try {
    const options = { entrants: text, prizes: text, reserves: text, rule: text, out: text, receipts: text }
    return parseArgs({ args: [...args], allowPositionals: false, options }).values
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error))
  }
}

function required(value: string | undefined, option: string): string {
  if (value === undefined || value === '') throw new UsageError(`${option} is missing.`)
  return value
}

function whole(text: string, least: number, option: string): number {
  const value = /^(?:0|[1-9][0-9]{0,5})$/.test(text.trim()) ? Number(text) : Number.NaN
  if (!(value >= least && value <= MAX_PICKS)) {
    throw new UsageError(
      `${option} wants whole numbers from ${least} to ${MAX_PICKS}; ${JSON.stringify(text)} is none.`,
    )
  }
  return value
}
