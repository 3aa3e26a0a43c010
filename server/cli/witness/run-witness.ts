import { createServer, type IncomingMessage, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { MAX_ADD_CHECKPOINT_BYTES } from '#shared/log/add-checkpoint.ts'
import { formatVkey } from '#shared/log/signed-note.ts'
import type { WitnessArguments } from './arguments.ts'
import { StateFile } from './state-file.ts'
import { Witness } from './witness.ts'

export interface RunningWitness {
  /** Its key, as it is handed on. */
  readonly vkey: string
  readonly url: string
  close(): Promise<void>
}

/** Starts a witness that listens until it is closed. `say` is told what a person should know. */
export async function runWitness(
  { signing, key, logs, state, port, host }: WitnessArguments,
  say: (line: string) => void,
): Promise<RunningWitness> {
  const witness = new Witness({
    sha256,
    key,
    sign: (message) => signing.sign(message),
    logs,
    state: await StateFile.open(state),
    now: () => Math.floor(Date.now() / 1000),
    onFork: (note, words) =>
      say(`NOT COSIGNED. ${words} Keep this checkpoint: it may be proof against its log.\n${note}`),
  })
  const server = createServer((request, response) => {
    const answer = (status: number, type: string, body: string) => {
      response.writeHead(status, { 'content-type': type, 'content-length': Buffer.byteLength(body) })
      response.end(body)
    }
    const plain = 'text/plain; charset=utf-8'
    if (!(request.url ?? '').split('?')[0]?.endsWith('/add-checkpoint')) return answer(404, plain, 'Not found.\n')
    if (request.method !== 'POST') return answer(405, plain, 'Ask with POST.\n')
    bodyOf(request)
      .then((body) => (body === null ? null : witness.addCheckpoint(body)))
      .then((done) => {
        if (done === null) return answer(413, plain, 'The request is too long.\n')
        if (done.status === 200) say(`Cosigned: ${done.body.trimEnd()}`)
        answer(done.status, done.type, done.body)
      })
      .catch((error: unknown) => {
        say(`A checkpoint could not be remembered, so it was not cosigned: ${String(error)}`)
        answer(500, plain, 'The witness cannot answer now.\n')
      })
  })
  server.requestTimeout = 30_000
  const url = await listen(server, port, host)
  const close = () =>
    new Promise<void>((resolve) => {
      server.close(() => resolve())
      server.closeAllConnections()
    })
  return { vkey: formatVkey(key), url, close }
}

function listen(server: Server, port: number, host: string): Promise<string> {
  return new Promise((resolve, reject) => {
    server.once('error', reject)
    server.listen(port, host, () => resolve(`http://${host}:${(server.address() as AddressInfo).port}`))
  })
}

async function bodyOf(request: IncomingMessage): Promise<Uint8Array | null> {
  const pieces: Buffer[] = []
  let size = 0
  for await (const piece of request) {
    size += (piece as Buffer).length
    if (size > MAX_ADD_CHECKPOINT_BYTES) return null
    pieces.push(piece as Buffer)
  }
  return new Uint8Array(Buffer.concat(pieces))
}
