import { execFile } from 'node:child_process'
import { createWriteStream, mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import { fileURLToPath, pathToFileURL } from 'node:url'
import { promisify } from 'node:util'
import { type Browser, chromium } from '@playwright/test'
import { readCheckFiles } from '#server/adapters/archive/check-files.ts'
import { openFileSource } from '#server/adapters/archive/file-source.ts'
import { zlibReader } from '#server/adapters/archive/zlib-codec.ts'
import { treeCalls } from '#server/cli/bench/bare.ts'
import type { BenchSection } from '#server/cli/bench/report.ts'
import {
  bufferedEntropy,
  drawRehearsal,
  machineEntropy,
  prepareList,
  rehearsalArchive,
  sealEntrant,
  sealRehearsal,
} from '#server/cli/rehearse/rehearsal.ts'
import { openZip } from '#shared/archive/zip-reader.ts'

const ROOT = fileURLToPath(new URL('../../..', import.meta.url))
const PAGE = join(ROOT, 'build', 'check-page', 'check.html')
const ROUNDS = 5
/** The goals: a check takes at most so many times the bare hashing, and the whole tab so much memory. */
const GOAL_RATIO = 2.5
const GOAL_MEMORY = 300e6

/** The check in Chromium, beside the SHA-256 calls that it needs, by the same hash in a worker of the same browser. */
export function browserSection(size: number): BenchSection {
  return {
    name: 'browser',
    title: 'The check in a browser, beside the bare SHA-256 calls in the same browser',
    async run(print) {
      const folder = mkdtempSync(join(tmpdir(), 'evenpenny-bench-'))
      const browser = await chromium.launch({
        executablePath: '/usr/bin/chromium',
        args: ['--no-sandbox', '--disable-gpu', '--no-first-run', '--disable-background-networking', '--disable-sync'],
      })
      try {
        await promisify(execFile)(process.execPath, ['server/check/page.mjs'], { cwd: ROOT })
        const archive = join(folder, 'proof.zip')
        await writeArchive(archive, size)
        await measure(browser, archive, size, print)
      } finally {
        await browser.close()
        rmSync(folder, { recursive: true, force: true })
      }
    },
  }
}

async function measure(browser: Browser, archive: string, size: number, print: (line: string) => void) {
  const bare = await bareHasher(browser)
  const work = { calls: treeCalls(size), streams: await memberSizes(archive) }
  const ratios: number[] = []
  let peak = 0
  try {
    // The first round warms the machine's caches and is not counted.
    for (let round = 0; round <= ROUNDS; round++) {
      const bareTime = await bare.run(work)
      const check = await checkOnce(browser, archive)
      if (round === 0) continue
      ratios.push(check.milliseconds / bareTime)
      peak = Math.max(peak, check.peakBytes)
      const times = `${check.milliseconds.toFixed(0)} ms   bare SHA-256 ${bareTime.toFixed(0)} ms`
      print(`  ${size} entrants, round ${round}   ${times}   ratio ${(check.milliseconds / bareTime).toFixed(2)}`)
    }
  } finally {
    await bare.close()
  }
  const ratio = ratios.sort((a, b) => a - b)[ratios.length >> 1] ?? Number.NaN
  print(`  median ratio ${ratio.toFixed(2)}   goal ${GOAL_RATIO} ${ratio <= GOAL_RATIO ? 'met' : 'MISSED'}`)
  if (peak === 0) print('  memory: only measured on Linux')
  else {
    const verdict = peak <= GOAL_MEMORY ? 'met' : 'MISSED'
    const share = (peak / GOAL_MEMORY).toFixed(2)
    print(
      `  most memory of the whole tab, libraries included: ${share} of the ${GOAL_MEMORY / 1e6} MB allowed, ${verdict}`,
    )
  }
}

/** Checks the archive once in a new tab: from the click to the verdict, and the most memory that the tab's process held. */
async function checkOnce(browser: Browser, archive: string): Promise<{ milliseconds: number; peakBytes: number }> {
  const page = await (await browser.newContext({ offline: true })).newPage()
  await page.goto(pathToFileURL(PAGE).href)
  await page.locator('#check-files').setInputFiles(archive)
  await page.getByLabel('This is a demonstration: let it pass').check()
  await page.getByText('To be checked:').waitFor()
  const { milliseconds, heading } = await page.evaluate(
    () =>
      new Promise<{ milliseconds: number; heading: string }>((resolve) => {
        const started = performance.now()
        new MutationObserver((_changes, observer) => {
          const heading = document.querySelector('.verdict-half h3, .notice.fault h3')?.textContent
          if (!heading) return
          observer.disconnect()
          resolve({ milliseconds: performance.now() - started, heading })
        }).observe(document.body, { subtree: true, childList: true })
        document.querySelector<HTMLButtonElement>('button[type=submit]')?.click()
      }),
  )
  const peakBytes = await largestRenderer(browser)
  await page.context().close()
  if (heading !== 'The arithmetic holds') throw new Error(`The check ended with: ${heading}`)
  return { milliseconds, peakBytes }
}

/** The peak of resident memory of the largest page process, in bytes; 0 where the system does not tell. */
async function largestRenderer(browser: Browser): Promise<number> {
  const session = await browser.newBrowserCDPSession()
  const { processInfo } = await session.send('SystemInfo.getProcessInfo')
  await session.detach()
  const peaks = processInfo
    .filter(({ type }) => type === 'renderer')
    .map(({ id }) => {
      try {
        return 1024 * Number(/VmHWM:\s+(\d+) kB/.exec(readFileSync(`/proc/${id}/status`, 'utf8'))?.[1] ?? 0)
      } catch {
        return 0
      }
    })
  return Math.max(0, ...peaks)
}

interface BareWork {
  readonly calls: readonly { readonly count: number; readonly length: number }[]
  readonly streams: readonly number[]
}

/** A page of the same browser whose worker makes bare calls. */
async function bareHasher(browser: Browser) {
  const { build } = await import('vite')
  const built = await build({
    root: ROOT,
    configFile: false,
    logLevel: 'warn',
    publicDir: false,
    build: {
      write: false,
      target: 'es2022',
      rollupOptions: { input: 'src/entry/bare-hash.ts', output: { format: 'iife' } },
    },
  })
  const outputs = [built].flat().flatMap((result) => ('output' in result ? result.output : []))
  const code = outputs.flatMap((item) => (item.type === 'chunk' ? [item.code] : [])).join('\n')
  const server = createServer((request, response) => {
    response.setHeader('Content-Type', request.url === '/worker.js' ? 'text/javascript' : 'text/html')
    response.end(request.url === '/worker.js' ? code : '<!doctype html><title>Bare hashes</title>')
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const page = await (await browser.newContext()).newPage()
  await page.goto(`http://127.0.0.1:${(server.address() as AddressInfo).port}/`)
  return {
    run: (work: BareWork) =>
      page.evaluate(
        (given) =>
          new Promise<number>((resolve, reject) => {
            const worker = new Worker('/worker.js')
            worker.onerror = () => reject(new Error('The bare worker failed.'))
            worker.onmessage = (event: MessageEvent<number>) => {
              worker.terminate()
              resolve(event.data)
            }
            worker.postMessage(given)
          }),
        work,
      ),
    close: async () => {
      await page.context().close()
      server.close()
    },
  }
}

/** A rehearsed archive of so many entrants, written to a file. */
async function writeArchive(file: string, size: number): Promise<void> {
  const entropy = bufferedEntropy(machineEntropy)
  const entrants = Array.from({ length: size }, (_, i) =>
    sealEntrant(
      {
        row: i + 2,
        name: 'Freja Castellanos',
        label: 'Freja C.',
        tickets: 1 + ((i * 7919) % 40),
        email: `entrant${i}@post.example`,
        phone: '',
        numbers: '',
        ranges: [],
      },
      entropy,
    ),
  )
  const blindingKey = entropy(32)
  const prepared = prepareList(entrants, blindingKey)
  const now = Date.now() / 1000
  const base = { entrants, prepared, blindingKey, prizes: [1, 9, 90], reserves: 900, rule: 'one-prize-each' as const }
  const sealed = sealRehearsal(base, now, entropy)
  const chunks = rehearsalArchive(sealed, drawRehearsal(sealed, now), await readCheckFiles())
  await pipeline(Readable.from(chunks), createWriteStream(file, { flags: 'wx' }))
}

async function memberSizes(file: string): Promise<number[]> {
  const source = await openFileSource(file)
  try {
    const zip = await openZip(source, zlibReader)
    return zip.names.map((name) => zip.size(name)).filter((size) => size > 0)
  } finally {
    await source.close()
  }
}
