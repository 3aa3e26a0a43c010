import { simpleParser } from 'mailparser'
import { SMTPServer } from 'smtp-server'
import { loopback } from '../loopback.ts'
import type { MailStore } from './mail-store.ts'

/** What the mail server says to a recipient. */
export type Verdict = 'accept' | { readonly code: number; readonly message: string }

/**
 * The recipients that always go wrong: everybody at bounce.example is unknown (550), and everybody at busy.example is
 * turned away at the first try (451) and accepted at the next.
 */
export function standardVerdicts(): (address: string) => Verdict {
  const tried = new Set<string>()
  return (address) => {
    const at = address.toLowerCase()
    if (at.endsWith('@bounce.example')) return { code: 550, message: '5.1.1 No such mailbox here' }
    if (at.endsWith('@busy.example') && !tried.has(at)) {
      tried.add(at)
      return { code: 451, message: '4.7.1 Try again later' }
    }
    return 'accept'
  }
}

export interface SmtpFakeOptions {
  readonly port: number
  readonly store: MailStore
  readonly now?: () => Date
  /** Called for each recipient; the standard verdicts unless a test says otherwise. */
  readonly verdict?: (address: string) => Verdict
}

/** Starts a mail server on loopback that delivers into the store. */
export async function startSmtp(options: SmtpFakeOptions): Promise<{ port: number; close(): Promise<void> }> {
  const verdict = options.verdict ?? standardVerdicts()
  const now = options.now ?? (() => new Date())
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['AUTH', 'STARTTLS'],
    disableReverseLookup: true,
    logger: false,
    size: 30 * 1024 * 1024,
    onRcptTo({ address }, _session, done) {
      const said = verdict(address)
      if (said === 'accept') done()
      else done(Object.assign(new Error(said.message), { responseCode: said.code }))
    },
    onData(stream, session, done) {
      const pieces: Buffer[] = []
      stream.on('data', (piece: Buffer) => pieces.push(piece))
      stream.on('error', done)
      stream.on('end', () => {
        if (stream.sizeExceeded) {
          done(Object.assign(new Error('5.3.4 Message too big'), { responseCode: 552 }))
          return
        }
        const raw = Buffer.concat(pieces)
        simpleParser(raw).then(
          (parsed) => {
            options.store.add(raw, {
              receivedAt: now().toISOString(),
              to: session.envelope.rcptTo.map(({ address }) => address.toLowerCase()),
              from: session.envelope.mailFrom ? session.envelope.mailFrom.address : '',
              subject: parsed.subject ?? '',
              messageId: parsed.messageId ?? '',
              attachments: parsed.attachments.map((attachment, index) => attachment.filename ?? `part-${index + 1}`),
            })
            done()
          },
          (error: Error) => done(error),
        )
      })
    },
  })
  await new Promise<void>((resolve, reject) => {
    server.server.once('error', reject)
    server.listen(options.port, loopback, resolve)
  })
  // A client that hangs up early is no reason to stop.
  server.on('error', () => undefined)
  const address = server.server.address()
  return {
    port: typeof address === 'object' && address ? address.port : options.port,
    close: () => new Promise((resolve) => server.close(() => resolve())),
  }
}
