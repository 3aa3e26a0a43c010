import { Buffer } from 'node:buffer'
import { nodeCheckTools } from '#server/adapters/archive/check-tools.ts'
import { type CheckFiles, readCheckFiles } from '#server/adapters/archive/check-files.ts'
import { zlibReader } from '#server/adapters/archive/zlib-codec.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { bareCsvParse, bareHashes, commitmentCalls, pieces, treeCalls } from '#server/cli/bench/bare.ts'
import { type BenchClock, type BenchSection, growth, measureLine, timed } from '#server/cli/bench/report.ts'
import {
  bufferedEntropy,
  drawRehearsal,
  machineEntropy,
  prepareList,
  rehearsalArchive,
  sealEntrant,
  sealRehearsal,
} from '#server/cli/rehearse/rehearsal.ts'
import { readEntrantCsv } from '#server/commands/entrants/read-entrant-csv.ts'
import { memorySource } from '#shared/archive/byte-source.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { checkArchive } from '#shared/protocol/check/check-archive.ts'
import type { SealEntrant } from '#shared/protocol/entrants.ts'
import { runDraw } from '#shared/protocol/draw.ts'

const PRIZES = [1, 9, 90]
const PICKS = 1000
/** The exponent of n log n between 10^4 and 10^6, and a little for a machine that is not quiet. */
const MOST_GROWTH = 1.2

/** Rehearsals of growing size, each part beside the bare calls that it needs. */
export function rehearsalSection(sizes: readonly number[], clock: BenchClock): BenchSection {
  return {
    name: 'rehearsal',
    title: 'Rehearsal: import, commitments and tree, draw, archive, check',
    run: async (print) => {
      const check = await readCheckFiles()
      const times = new Map<string, [number, number][]>()
      // What runs first pays for the compiling of everything: a small one that nobody sees.
      await rehearse(2000, clock, check, () => {}, new Map())
      for (const size of sizes) await rehearse(size, clock, check, print, times)
      print(
        '  A check of a short list is mostly the beacon, the signatures and the coins, which cost the same at any length.',
      )
      if (sizes.length < 2) return
      print(`  growth, as a power of the number of entrants (goal ${MOST_GROWTH}; n log n is 1.09 to 1.12):`)
      for (const [name, points] of times) {
        const power = growth(points)
        print(`    ${name.padEnd(22)} ${power.toFixed(2)} ${power <= MOST_GROWTH ? 'met' : 'MISSED'}`)
      }
    },
  }
}

async function rehearse(
  size: number,
  clock: BenchClock,
  check: CheckFiles,
  print: (line: string) => void,
  times: Map<string, [number, number][]>,
): Promise<void> {
  print(`  ${size} entrants`)
  const keep = (name: string, milliseconds: number) => {
    times.set(name, [...(times.get(name) ?? []), [size, milliseconds]])
  }
  const csv = entrantFile(size)
  const bareCsv = await timed(clock, () => bareCsvParse(csv))
  const entropy = bufferedEntropy(machineEntropy)
  const entrants: SealEntrant[] = []
  const read = await timed(clock, () =>
    readEntrantCsv(asyncPieces(csv), { onEntrant: (row) => void entrants.push(sealEntrant(row, entropy)) }),
  )
  if (read.value.problemCount > 0) throw new Error(read.value.problems[0]?.message)
  keep('import', read.milliseconds)
  const bareParse = { what: 'CSV parse', milliseconds: bareCsv.milliseconds }
  print(measureLine({ name: 'import', milliseconds: read.milliseconds, bare: bareParse }))

  const blindingKey = entropy(32)
  const [reference, label, identity] = meanLengths(entrants)
  const commitments = [...commitmentCalls(size, reference, label, identity), ...treeCalls(size)]
  const bareSeal = await timed(clock, () => bareHashes(commitments))
  const list = await timed(clock, () => prepareList(entrants, blindingKey))
  const prepared = list.value
  keep('commitments and tree', list.milliseconds)
  print(
    measureLine({
      name: 'commitments and tree',
      milliseconds: list.milliseconds,
      bare: { what: 'SHA-256', milliseconds: bareSeal.milliseconds },
      goal: { kind: 'ratio', most: 1.5 },
    }),
  )

  const now = Date.now() / 1000
  const base = {
    entrants,
    prepared,
    blindingKey,
    prizes: PRIZES,
    reserves: PICKS - 100,
    rule: 'one-prize-each' as const,
  }
  const sealed = sealRehearsal(base, now, entropy)
  const draw = await timed(clock, () =>
    runDraw(sha256, {
      tickets: prepared.tickets,
      rule: 'one-prize-each',
      prizes: sealed.seal.prizes,
      reserves: sealed.seal.reserves,
      flips: { kind: 'derived', drawKey: sealed.seed },
    }),
  )
  print(
    measureLine({
      name: `draw, ${draw.value.picks.length} picks`,
      milliseconds: draw.milliseconds,
      goal: { kind: 'milliseconds', most: 200 },
    }),
  )
  keep('draw', draw.milliseconds)
  const drawn = drawRehearsal(sealed, now)
  const archive = await timed(clock, async () => {
    const chunks: Uint8Array[] = []
    for await (const chunk of rehearsalArchive(sealed, drawn, check)) chunks.push(chunk)
    return new Uint8Array(Buffer.concat(chunks))
  })
  keep('archive', archive.milliseconds)
  print(
    measureLine({
      name: `archive, ${(archive.value.length / 2 ** 20).toFixed(1)} MiB`,
      milliseconds: archive.milliseconds,
    }),
  )
  // What is not looked at any more should not weigh on what is measured next.
  entrants.length = 0

  const sizes = await memberSizes(archive.value)
  const bareCheck = await timed(clock, () => {
    bareHashes(treeCalls(size))
    for (const length of sizes) bareHashes([{ count: 1, length }])
  })
  const checked = await timed(clock, () => checkZip(archive.value, clock))
  keep('check', checked.milliseconds)
  print(
    measureLine({
      name: 'check',
      milliseconds: checked.milliseconds,
      bare: { what: 'SHA-256', milliseconds: bareCheck.milliseconds },
      goal: { kind: 'ratio', most: 1.5 },
    }),
  )
  for (const line of checked.value) print(`    ${line}`)
}

/** What SHA256SUMS covers, in bytes: a check must hash all of it as well. */
async function memberSizes(zip: Uint8Array): Promise<number[]> {
  const source = await openZip(memorySource(zip), zlibReader)
  return source.names.map((name) => source.size(name)).filter((size) => size > 0)
}

/** Checks an archive in memory; returns the times of the steps that took some. */
async function checkZip(zip: Uint8Array, clock: BenchClock): Promise<string[]> {
  const lines: string[] = []
  const report = await checkArchive({
    open: () => openZip(memorySource(zip), zlibReader),
    tools: { ...nodeCheckTools, now: clock },
    options: { allowDevelopmentChain: true },
    onEvent: (event) => {
      if (event.kind === 'step-passed' && event.milliseconds >= 5) {
        lines.push(`step ${event.step} ${event.title}: ${event.milliseconds.toFixed(0)} ms`)
      }
    },
  })
  if (!report.ok) throw new Error(`The archive fails at step ${report.failure.step}: ${report.failure.message}`)
  return lines
}

const GIVEN = ['Anouk', 'Bartosz', 'Chidi', 'Dunya', 'Elias', 'Freja', 'Gwen', 'Hamza']
const FAMILY = ['Achterberg', 'Bondarenko', 'Castellanos', 'Dlamini', 'Eriksen', 'Fontaine', 'Guðmundsson']

/** An invented file: tickets from 1 to 40, an e-mail address for three in four. */
function entrantFile(size: number): Uint8Array {
  const lines = ['name,tickets,email\n']
  for (let i = 0; i < size; i++) {
    const name = `${GIVEN[i % GIVEN.length]} ${FAMILY[(i * 3) % FAMILY.length]}`
    lines.push(`${name},${1 + ((i * 7919) % 40)},${i % 4 === 0 ? '' : `entrant${i}@post.example`}\n`)
  }
  return new Uint8Array(Buffer.from(lines.join('')))
}

function meanLengths(entrants: readonly SealEntrant[]): [reference: number, label: number, identity: number] {
  const sample = entrants.slice(0, 1000)
  const mean = (length: (entrant: SealEntrant) => number) =>
    Math.round(sample.reduce((sum, entrant) => sum + length(entrant), 0) / sample.length)
  return [
    mean(({ identity }) => identity.reference.length),
    mean(({ label }) => Buffer.byteLength(label)),
    mean(({ identity }) => Buffer.byteLength(JSON.stringify(identity))),
  ]
}

async function* asyncPieces(bytes: Uint8Array): AsyncGenerator<Uint8Array> {
  yield* pieces(bytes)
}
