import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'
import autocannon from 'autocannon'
import type { BenchSection } from '#server/cli/bench/report.ts'

/** Requests a second, each the median of its rounds, and what was asked for. */
interface ServerBench {
  /** The page's path. */
  readonly page: string
  /** Of its body, uncompressed. */
  readonly bytes: number
  readonly site: number
  readonly bare: number
  /** The median of site / bare, round by round: what else the machine does weighs on both of a round alike. */
  readonly ratio: number
}

interface ServerBenchOptions {
  readonly rounds: number
  /** Of each half of a round, in seconds. */
  readonly seconds: number
  readonly connections: number
}

const ROOT = fileURLToPath(new URL('../../..', import.meta.url))
/** The goal: the site answers at least this share of what the bare server does. */
const GOAL = 0.8

/**
 * Requests a second for a result page, beside a bare node:http server in a process of its own that sends the same bytes
 * with the same headers, in turns. The site runs as a whole, on a database with the demo data.
 */
export const serverSection: BenchSection = {
  name: 'server',
  title: 'Requests a second for a result page, beside a bare node:http server that sends the same bytes',
  async run(print) {
    const bench = await benchServer({ rounds: 7, seconds: 3, connections: 32 })
    const rate = (value: number) => Math.round(value).toLocaleString('en-GB').padStart(8)
    print(`  ${bench.page}: ${bench.bytes.toLocaleString('en-GB')} bytes`)
    print(`  the site                 ${rate(bench.site)}`)
    print(
      `  bare node:http           ${rate(bench.bare)}   ratio ${bench.ratio.toFixed(2)}` +
        `   goal ${GOAL.toFixed(2)} ${bench.ratio >= GOAL ? 'met' : 'MISSED'}`,
    )
  },
}

async function benchServer({ rounds, seconds, connections }: ServerBenchOptions): Promise<ServerBench> {
  const stack = await startStack()
  try {
    const url = await longestResultPage(stack.site)
    const sample = await answerOf(url)
    const bare = await startBare(sample)
    try {
      const once = async (target: string) => {
        const run = await autocannon({ url: target, connections, duration: seconds })
        if (run.non2xx > 0 || run.errors > 0)
          throw new Error(`${run.non2xx + run.errors} requests to ${target} failed.`)
        return run.requests.average
      }
      const targets = { site: url, bare: `http://127.0.0.1:${bare.port}/` }
      // Both warm up before anything counts.
      for (const target of Object.values(targets)) await autocannon({ url: target, connections, duration: 2 })
      const counts = { site: [] as number[], bare: [] as number[] }
      for (let round = 0; round < rounds; round++) {
        counts.site.push(await once(targets.site))
        counts.bare.push(await once(targets.bare))
      }
      const [site, plain] = [median(counts.site), median(counts.bare)]
      const ratio = median(counts.site.map((count, round) => count / (counts.bare[round] ?? Number.NaN)))
      return { page: new URL(url).pathname, bytes: sample.body.length, site, bare: plain, ratio }
    } finally {
      await end(bare.process)
    }
  } finally {
    await end(stack.process)
  }
}

interface Answer {
  readonly headers: Readonly<Record<string, string>>
  readonly body: Buffer
}

async function answerOf(url: string): Promise<Answer> {
  const response = await fetch(url, { headers: { 'accept-encoding': 'identity' } })
  if (!response.ok) throw new Error(`${url} answers ${response.status}.`)
  const perConnection = new Set(['connection', 'keep-alive', 'date', 'transfer-encoding'])
  const headers = Object.fromEntries([...response.headers].filter(([name]) => !perConnection.has(name)))
  const body = Buffer.from(await response.arrayBuffer())
  return { headers: { ...headers, 'content-length': String(body.length) }, body }
}

/** The drawn draw with the most entrants: its page is the longest. */
async function longestResultPage(site: string): Promise<string> {
  const response = await fetch(`${site}/api/draws?state=drawn`)
  const { items } = (await response.json()) as { items: { slug: string; entrants: number | null }[] }
  const [longest] = [...items].sort((a, b) => (b.entrants ?? 0) - (a.entrants ?? 0))
  if (!longest) throw new Error('The demo data holds no draw that is drawn.')
  return `${site}/draws/${longest.slug}`
}

async function startStack(): Promise<{ process: ChildProcess; site: string }> {
  const child = spawn(process.execPath, ['server/setup/browser-stack.mjs'], {
    cwd: ROOT,
    stdio: ['pipe', 'pipe', 'inherit'],
  })
  const { site } = JSON.parse(await firstLine(child, 'The stack')) as { site: string }
  return { process: child, site }
}

async function startBare(answer: Answer): Promise<{ process: ChildProcess; port: number }> {
  const child = spawn(process.execPath, [fileURLToPath(new URL('./bare-server.mjs', import.meta.url))], {
    stdio: ['pipe', 'pipe', 'inherit'],
  })
  child.stdin?.write(`${JSON.stringify({ headers: answer.headers, body: answer.body.toString('base64') })}\n`)
  return { process: child, port: Number(await firstLine(child, 'The bare server')) }
}

function firstLine(child: ChildProcess, what: string): Promise<string> {
  return new Promise((resolve, reject) => {
    if (!child.stdout) throw new Error('The output of the process is not at hand.')
    createInterface({ input: child.stdout }).once('line', resolve)
    child.once('error', reject)
    child.once('exit', (code) => reject(new Error(`${what} ended before it was ready (exit code ${code}).`)))
  })
}

/** Both end with their standard input. */
async function end(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null || child.signalCode !== null) return
  const ended = once(child, 'exit')
  child.stdin?.end()
  await ended
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b)
  return sorted[Math.floor(sorted.length / 2)] ?? 0
}
