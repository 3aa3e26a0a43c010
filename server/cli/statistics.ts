import { closeSync, openSync, writeSync } from 'node:fs'
import { parseArgs } from 'node:util'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { writeDerivedFlips } from '#server/cli/statistics/derived-flips.ts'
import { flipLines } from '#server/cli/statistics/flip-report.ts'
import { orderLines } from '#server/cli/statistics/order-report.ts'

const USAGE = `Usage: npm run statistics -- [--flips 10000000] [--draws 1000] [--seed TEXT] [--out FILE]

Makes flips of derived draws and whole draws, from keys that follow from the seed, and tests them.
--out writes the flips, eight a byte, for other programs: ent FILE, rngtest < FILE.`

const { values } = parseArgs({
  options: {
    flips: { type: 'string', default: '10000000' },
    draws: { type: 'string', default: '1000' },
    seed: { type: 'string', default: 'evenpenny statistics' },
    out: { type: 'string' },
  },
})
const [flips, draws] = [Number(values.flips), Number(values.draws)]

if (!Number.isInteger(flips) || flips < 1_000_000 || flips > 100_000_000 || flips % 20_000 !== 0) {
  console.error(`${USAGE}\n\n--flips takes a multiple of 20000 from 1000000 to 100000000.`)
  process.exitCode = 2
} else if (!Number.isInteger(draws) || draws < 100 || draws > 100_000) {
  console.error(`${USAGE}\n\n--draws takes a whole number from 100 to 100000.`)
  process.exitCode = 2
} else {
  const bits = new Uint8Array(flips)
  const file = values.out === undefined ? null : openSync(values.out, 'w')
  let at = 0
  for (const bytes of writeDerivedFlips(sha256, values.seed, flips)) {
    for (const byte of bytes) for (let bit = 7; bit >= 0; bit -= 1) bits[at++] = (byte >> bit) & 1
    if (file !== null) writeSync(file, bytes)
  }
  if (file !== null) closeSync(file)
  console.log(`${flips} flips, seed "${values.seed}"`)
  for (const line of flipLines(bits)) console.log(`  ${line}`)
  console.log(`${draws} draws of 366 entrants with one ticket each, all picked`)
  for (const line of orderLines(draws, values.seed)) console.log(`  ${line}`)
}
