import { mkdtemp, readFile, rm, stat } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { basename, join } from 'node:path'
import { nodeCheckTools } from '#server/adapters/archive/check-tools.ts'
import { openFileSource } from '#server/adapters/archive/file-source.ts'
import { openFolder } from '#server/adapters/archive/folder-source.ts'
import { zlibReader } from '#server/adapters/archive/zlib-codec.ts'
import { CHECK_USAGE, readCheckArguments, UsageError } from '#server/cli/check/arguments.ts'
import { fetchArchive, FetchError, type FetchLimits } from '#server/cli/check/fetch-archive.ts'
import { watchLog } from '#server/cli/check/watch-log.ts'
import type { MembersSource } from '#shared/archive/members-source.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { checkArchive, type CheckEvent, type CheckReport } from '#shared/protocol/check/check-archive.ts'
import type { CheckOptions, GivenReceipt } from '#shared/protocol/check/state.ts'
import { type Certificate, certificatesOfPem } from '#shared/timestamp/certificate.ts'
import { BEYOND_ANY_CHECK, verdictSentences } from '#shared/protocol/check/verdict.ts'

export interface Output {
  out(line: string): void
  error(line: string): void
}

/** Runs `npm run check`; returns its exit status: 0 all arithmetic holds, 1 it does not, 2 wrong usage. */
export async function runCheck(args: readonly string[], output: Output, limits?: FetchLimits): Promise<0 | 1 | 2> {
  let folder: string | null = null
  try {
    const { archive, receipts, expectedKey, testBeacon, remember, testTimestamps, ...trust } = readCheckArguments(args)
    const given = await readReceipts(receipts)
    const trustedAuthorities = await readAuthorities(trust.authorities)
    let path: string
    if (archive.kind === 'url') {
      folder = await mkdtemp(join(tmpdir(), 'evenpenny-check-'))
      path = join(folder, 'proof.zip')
      output.out(`Fetching ${archive.url.href}`)
      await fetchArchive(archive.url, path, limits)
    } else path = archive.path
    const report = await checkPath(path, (event) => printEvent(event, output), {
      allowDevelopmentChain: testBeacon,
      receipts: given,
      trustedAuthorities,
      allowDevelopmentAuthority: testTimestamps,
      witnesses: trust.witnesses,
      ...(expectedKey === undefined ? {} : { expectedKey }),
    })
    printReport(report, output)
    if (!report.ok || remember === undefined) return report.ok ? 0 : 1
    const { log, publicKey } = report
    const site = archive.kind === 'url' ? archive.url.origin : null
    const watched = await watchLog({ file: remember, site, archived: log, publicKey })
    output.out('The log:')
    for (const line of watched.lines) output.out(printable(`- ${line}`))
    if (watched.alarm) output.out('FAILED: the log is not the one that was seen before. The arithmetic above holds all the same.')
    return watched.alarm ? 1 : 0
  } catch (error) {
    if (error instanceof FetchError) {
      output.error(error.message)
      return 1
    }
    if (!(error instanceof UsageError)) throw error
    output.error(`${error.message}\n\n${CHECK_USAGE}`)
    return 2
  } finally {
    if (folder !== null) await rm(folder, { recursive: true, force: true })
  }
}

/** Checks an archive, zipped or unpacked, that lies on this machine. Throws UsageError where nothing lies there. */
export async function checkPath(
  path: string,
  onEvent: (event: CheckEvent) => void,
  options: CheckOptions,
): Promise<CheckReport> {
  const found = await stat(path).catch(() => null)
  if (found === null) throw new UsageError(`There is no ${path}.`)
  const run = (open: () => Promise<MembersSource>) => checkArchive({ open, tools: nodeCheckTools, options, onEvent })
  if (found.isDirectory()) return run(() => openFolder(path))
  const file = await openFileSource(path)
  try {
    return await run(() => openZip(file, zlibReader))
  } finally {
    await file.close()
  }
}

/** The certificates in files of PEM. Throws UsageError where a file holds none that can be read. */
async function readAuthorities(paths: readonly string[]): Promise<Certificate[]> {
  const found: Certificate[] = []
  for (const path of paths) {
    const text = await readFile(path, 'latin1').catch(() => null)
    if (text === null) throw new UsageError(`--tsa wants a file with certificates; there is no ${path}.`)
    let certificates: readonly Certificate[]
    try {
      certificates = certificatesOfPem(text)
    } catch {
      throw new UsageError(`--tsa: a certificate in ${path} cannot be read.`)
    }
    if (certificates.length === 0) throw new UsageError(`--tsa: ${path} holds no certificate in PEM.`)
    found.push(...certificates)
  }
  return found
}

async function readReceipts(paths: readonly string[]): Promise<GivenReceipt[]> {
  const receipts: GivenReceipt[] = []
  for (const path of paths) {
    const bytes = await readFile(path).catch(() => null)
    if (bytes === null) throw new UsageError(`There is no receipt ${path}.`)
    receipts.push({ name: basename(path), bytes: new Uint8Array(bytes) })
  }
  return receipts
}

function printEvent(event: CheckEvent, output: Output): void {
  if (event.kind !== 'step-passed') return
  output.out(`step ${event.step}  ${event.title} (${event.milliseconds.toFixed(0)} ms)\n        ${event.found}`)
}

function printReport(report: CheckReport, output: Output): void {
  if (!report.ok) {
    const { step, code, at, message } = report.failure
    output.out(printable(`FAILED at step ${step}: ${at}: ${message} [${code}]`))
    output.out('The arithmetic does not hold, or cannot be read. Nothing behind this step was looked at.')
    return
  }
  output.out('')
  for (const sentence of verdictSentences(report.verdict)) output.out(sentence)
  output.out('What no check can show:')
  for (const sentence of BEYOND_ANY_CHECK) output.out(`- ${sentence}`)
}

/** Text out of a hostile archive must not steer the terminal. */
function printable(text: string): string {
  return text.replace(/[\p{Cc}\p{Bidi_Control}]/gu, '\uFFFD')
}
