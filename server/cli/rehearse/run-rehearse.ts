import { createReadStream, createWriteStream } from 'node:fs'
import { access, mkdir, rm, writeFile } from 'node:fs/promises'
import { join } from 'node:path'
import { performance } from 'node:perf_hooks'
import { pipeline } from 'node:stream/promises'
import { readCheckFiles } from '#server/adapters/archive/check-files.ts'
import type { Output } from '#server/cli/check/run-check.ts'
import {
  readRehearseArguments,
  REHEARSE_USAGE,
  type RehearseArguments,
  UsageError,
} from '#server/cli/rehearse/arguments.ts'
import {
  bufferedEntropy,
  drawRehearsal,
  machineEntropy,
  prepareList,
  rehearsalArchive,
  rehearsalReceipts,
  sealEntrant,
  sealRehearsal,
} from '#server/cli/rehearse/rehearsal.ts'
import { readEntrantCsv } from '#server/commands/entrants/read-entrant-csv.ts'
import { toHex } from '#shared/bytes/hex.ts'
import type { SealEntrant } from '#shared/protocol/entrants.ts'
import { receiptBytes } from '#shared/protocol/receipt.ts'

/** Runs `npm run rehearse`; returns its exit status: 0 drawn and written, 1 the file is refused, 2 wrong usage. */
export async function runRehearse(args: readonly string[], output: Output): Promise<0 | 1 | 2> {
  try {
    return await rehearse(readRehearseArguments(args), output)
  } catch (error) {
    if (!(error instanceof UsageError)) throw error
    output.error(`${error.message}\n\n${REHEARSE_USAGE}`)
    return 2
  }
}

async function rehearse(options: RehearseArguments, output: Output): Promise<0 | 1> {
  await refuseWhatIsThere(options.out, '--out')
  if (options.receipts !== null) await refuseWhatIsThere(options.receipts, '--receipts')
  await access(options.entrants).catch(() => {
    throw new UsageError(`There is no ${options.entrants}.`)
  })
  const entropy = bufferedEntropy(machineEntropy)
  const timed = timer(output)

  const entrants: SealEntrant[] = []
  const read = await timed('import', () =>
    readEntrantCsv(createReadStream(options.entrants), {
      onEntrant: (row) => void entrants.push(sealEntrant(row, entropy)),
    }),
  )
  for (const note of read.notes) output.out(`Note: ${note.message}`)
  if (read.problemCount > 0) {
    for (const problem of read.problems) output.error(problem.message)
    const more = read.problemCount - read.problems.length
    output.error(`${more > 0 ? `And ${more} more. ` : ''}Nothing was drawn. Correct the file and try again.`)
    return 1
  }

  const blindingKey = entropy(32)
  const prepared = await timed('commitments and tree', () => prepareList(entrants, blindingKey))
  const { prizes, reserves, rule } = options
  const now = Date.now() / 1000
  const sealed = await timed('seal', () =>
    sealRehearsal({ entrants, prepared, blindingKey, prizes, reserves, rule }, now, entropy),
  )
  const drawn = await timed('draw', () => drawRehearsal(sealed, now))
  await timed('archive', async () => {
    const check = await readCheckFiles()
    const file = createWriteStream(options.out, { flags: 'wx' })
    await pipeline(rehearsalArchive(sealed, drawn, check), file).catch(async (error: unknown) => {
      await rm(options.out, { force: true })
      throw error
    })
  })
  const folder = options.receipts
  if (folder !== null) {
    await timed('receipts', async () => {
      await mkdir(folder, { recursive: true })
      for (const receipt of rehearsalReceipts(sealed)) {
        await writeFile(join(folder, `receipt-${receipt.leaf}.json`), receiptBytes(receipt), { flag: 'wx' })
      }
    })
  }
  const { count, tickets } = sealed.seal.entries
  output.out('')
  output.out(`Rehearsed: ${drawn.result.picks.length} picks from ${count} entrants with ${tickets} tickets.`)
  const wanted = prizes.reduce((sum, quantity) => sum + quantity, 0) + reserves
  if (drawn.result.picks.length < wanted) {
    output.out(`The draw ended early: it has ${wanted} prizes and reserves, and nobody is left who can win one.`)
  }
  output.out(`Seal ${toHex(sealed.sealDigest)}`)
  output.out(`Key  ${sealed.seal.key} (made for this rehearsal, and gone)`)
  output.out(
    'This is no real draw: its beacon is the development chain, whose secret is public, and its seal is dated back by two ' +
      'minutes so that nobody had to wait.',
  )
  output.out(`Check it with: npm run check -- --test-beacon ${options.out}`)
  return 0
}

/** Runs a step and prints its time. */
function timer(output: Output): <T>(name: string, step: () => T | Promise<T>) => Promise<T> {
  return async (name, step) => {
    const started = performance.now()
    const value = await step()
    output.out(`${name.padEnd(22)} ${(performance.now() - started).toFixed(0).padStart(8)} ms`)
    return value
  }
}

async function refuseWhatIsThere(path: string, option: string): Promise<void> {
  const there = await access(path).then(
    () => true,
    () => false,
  )
  if (there) throw new UsageError(`${path} is there already: name another with ${option}, or move it away.`)
}
