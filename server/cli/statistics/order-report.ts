import { sha256 } from '#server/adapters/hash/sha256.ts'
import { hmacSha256 } from '#shared/bytes/hashing.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { runDraw } from '#shared/protocol/draw.ts'
import { addSums, entryOrder, EntryOrderOfDraw, noPicks, spearman } from '#shared/statistics/order-tests.ts'

/** As many as days in a leap year: the size of the conscription draw that the tests flag. */
const ENTRANTS = 366
const LEVELS = [0.05, 0.01, 0.001]

/** Makes whole draws and tells how many the order tests flag at each level. */
export function* orderLines(draws: number, seed: string): Generator<string> {
  const tickets = new Float64Array(ENTRANTS).fill(1)
  const prizes = [{ id: 'p1', name: 'A prize', quantity: ENTRANTS }]
  const found: Record<'entry order' | 'Spearman', number[]> = { 'entry order': [], Spearman: [] }
  let all = noPicks
  for (let draw = 0; draw < draws; draw += 1) {
    const drawKey = hmacSha256(sha256, utf8(seed), utf8(`order ${draw}`))
    const flips = { kind: 'derived', drawKey } as const
    const { picks } = runDraw(sha256, { tickets, rule: 'one-prize-each', prizes, reserves: 0, flips })
    const order = new EntryOrderOfDraw(ENTRANTS, 'one-prize-each')
    for (const pick of picks) order.add(pick)
    all = addSums(all, order.sums())
    found['entry order'].push(entryOrder(order.sums())?.p ?? 1)
    const places = picks.map((_, place) => place + 1)
    found.Spearman.push(
      spearman(
        picks.map(({ leaf }) => leaf + 1),
        places,
      ).p,
    )
  }
  for (const [name, values] of Object.entries(found)) {
    const flagged = LEVELS.map((level) => `${values.filter((p) => p < level).length} at ${level}`)
    yield `${name.padEnd(12)} flags ${flagged.join(', ')}`
  }
  const tested = entryOrder(all)
  if (tested)
    yield `all picks together: mean place ${tested.mean.toFixed(5)}, z = ${tested.z.toFixed(3)}, p = ${tested.p.toFixed(4)}`
}
