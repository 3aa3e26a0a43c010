import { toHex } from '#shared/bytes/hex.ts'
import { parseTime } from '#shared/bytes/time.ts'
import { beaconFor, QUICKNET } from '#shared/protocol/networks.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'

const DRAW_AT = '2030-06-15T19:30:00Z'

/** A seal that keeps every rule; tests change what they are about. */
export function aSeal(changes: Partial<Seal> = {}): Seal {
  return {
    format: 'evenpenny/1',
    kind: 'seal',
    draw: 'spring-hamper',
    organisation: { name: 'Larkwater Choir', registration: '1187734' },
    title: 'Spring hamper',
    key: '1'.repeat(64),
    terms: '2'.repeat(64),
    sealedAt: '2030-06-15T18:00:00Z',
    drawAt: DRAW_AT,
    revealBy: null,
    entries: { count: 3, root: '3'.repeat(64), tickets: 12 },
    prizes: [
      { id: 'hamper', name: 'A hamper', quantity: 1 },
      { id: 'jam', name: 'Plum jam', quantity: 2 },
    ],
    reserves: 1,
    rule: 'one-prize-each',
    sources: {
      beacon: beaconFor(QUICKNET, parseTime(DRAW_AT) as number),
      flips: 'derived',
      seedCommit: '4'.repeat(64),
      tosses: null,
    },
    supersedes: null,
    reason: null,
    ...changes,
  }
}

/** Tosses as a seal plans them. */
export const aTossPlan = {
  minimumBits: 64,
  roundLength: 32,
  witnesses: ['treasurer of the allotment society'],
} as const

/** Hex of 32 equal bytes. */
export const digestOf = (byte: number): string => toHex(new Uint8Array(32).fill(byte))
