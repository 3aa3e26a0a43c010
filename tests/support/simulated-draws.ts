import { sha256 } from '#server/adapters/hash/sha256.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { type DrawPick, runDraw } from '#shared/protocol/draw.ts'
import type { WalkRule } from '#shared/sampling/walk.ts'

/** The picks of the product's own draws, one after another, with keys that follow from `seed`. */
export function* simulatedDraws(input: {
  readonly tickets: readonly number[]
  readonly rule: WalkRule
  readonly picks: number
  readonly draws: number
  readonly seed: string
}): Generator<readonly DrawPick[]> {
  const prizes = [{ id: 'p1', name: 'A prize', quantity: input.picks }]
  for (let draw = 0; draw < input.draws; draw += 1) {
    const drawKey = sha256(utf8(`${input.seed} ${draw}`))
    const { picks } = runDraw(sha256, {
      tickets: input.tickets,
      rule: input.rule,
      prizes,
      reserves: 0,
      flips: { kind: 'derived', drawKey },
    })
    yield picks
  }
}

/** In how many draws each entrant was picked at least once. */
export function countPicked(input: Parameters<typeof simulatedDraws>[0]): number[] {
  const counts = input.tickets.map(() => 0)
  for (const picks of simulatedDraws(input)) {
    for (const leaf of new Set(picks.map((pick) => pick.leaf))) counts[leaf] = (counts[leaf] as number) + 1
  }
  return counts
}
