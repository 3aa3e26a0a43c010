import { type ChildProcess, spawn } from 'node:child_process'
import { createInterface } from 'node:readline'
import { STACK_VARIABLE } from './stack.ts'

const READY_MS = 5 * 60_000
const STOP_MS = 60_000

/** Starts the whole product and tells the workers where it is; what it returns takes it down. */
export default async function globalSetup(): Promise<() => Promise<void>> {
  const child = spawn(process.execPath, ['server/setup/browser-stack.mjs'], { stdio: ['pipe', 'pipe', 'inherit'] })
  const ended = new Promise<number | null>((resolve) => child.once('close', (code) => resolve(code)))
  const addresses = await firstLine(child, ended)
  process.env[STACK_VARIABLE] = addresses
  return async () => {
    child.kill('SIGTERM')
    const late = setTimeout(() => child.kill('SIGKILL'), STOP_MS)
    const code = await ended
    clearTimeout(late)
    // It ends with 0 only if every service lasted until now.
    if (code !== 0) throw new Error(`The product under test ended with exit code ${code} (see above).`)
  }
}

async function firstLine(child: ChildProcess, ended: Promise<number | null>): Promise<string> {
  const { stdout } = child
  if (!stdout) throw new Error('The stack was started without an output to read.')
  const lines = createInterface({ input: stdout })
  const line = new Promise<string>((resolve) => lines.once('line', resolve))
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<never>((_resolve, reject) => {
    timer = setTimeout(() => {
      child.kill('SIGTERM')
      reject(new Error(`The product under test was not ready within ${READY_MS / 1000} seconds.`))
    }, READY_MS)
  })
  const over = ended.then((code) => {
    throw new Error(`The product under test ended with exit code ${code} before it was ready (see above).`)
  })
  try {
    return await Promise.race([line, over, late])
  } finally {
    clearTimeout(timer)
    over.catch(() => {})
  }
}
