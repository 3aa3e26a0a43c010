import { createHash } from 'node:crypto'
import { createTransport } from 'nodemailer'
import { type Health, reasonOf } from '../health.ts'
import { htmlAlternative } from './html-alternative.ts'

export interface MailerOptions {
  /** smtp:// or smtps://, with user and password where the server wants them. */
  readonly url: string
  /** "Evenpenny <draws@site.example>" */
  readonly from: string
  /** How long a server may take for each step, in milliseconds. */
  readonly timeoutMs?: number
}

export interface OutgoingMail {
  /** With its angle brackets; the same mail always has the same, so that a mail sent twice is seen as one. */
  readonly messageId: string
  /** One bare address. */
  readonly to: string
  readonly subject: string
  readonly text: string
  readonly replyTo?: string
  readonly attachments?: readonly {
    readonly name: string
    readonly contentType: string
    readonly content: Uint8Array
  }[]
}

/**
 * `temporary`: try again later; `permanent`: this mail will never be taken. Neither holds the recipient's address.
 */
export type MailOutcome =
  | { readonly kind: 'accepted' }
  | { readonly kind: 'temporary' | 'permanent'; readonly code: string; readonly detail: string }

export interface Mailer {
  send(mail: OutgoingMail): Promise<MailOutcome>
  /** Connects and signs in, sends nothing. */
  check(): Promise<Health>
  close(): void
}

/**
 * A Message-ID (RFC 5322 section 3.6.4) that follows from what the mail is: the same parts give the same id.
 * @param domain the site's host name
 */
export function messageIdFor(parts: readonly string[], domain: string): string {
  const digest = createHash('sha256').update(JSON.stringify(parts)).digest('hex').slice(0, 40)
  return `<${digest}@${domain}>`
}

export function createMailer(options: MailerOptions): Mailer {
  const timeout = options.timeoutMs ?? 20_000
  const transport = createTransport(
    {
      url: options.url,
      pool: true,
      maxConnections: 2,
      connectionTimeout: timeout,
      greetingTimeout: timeout,
      socketTimeout: timeout,
      disableFileAccess: true,
      disableUrlAccess: true,
    },
    { from: options.from },
  )
  return {
    async send(mail) {
      try {
        await transport.sendMail({
          to: { name: '', address: mail.to },
          subject: mail.subject,
          text: mail.text,
          html: htmlAlternative(mail.text),
          messageId: mail.messageId,
          ...(mail.replyTo ? { replyTo: mail.replyTo } : {}),
          // RFC 3834: no holiday replies to these, please.
          headers: { 'Auto-Submitted': 'auto-generated' },
          attachments: (mail.attachments ?? []).map(({ name, contentType, content }) => ({
            filename: name,
            contentType,
            content: Buffer.from(content),
          })),
        })
        return { kind: 'accepted' }
      } catch (error) {
        return classifyMailError(error, mail.to)
      }
    },
    async check() {
      const start = performance.now()
      try {
        await transport.verify()
        return { ok: true, milliseconds: since(start), detail: 'The mail server answers.' }
      } catch (error) {
        return { ok: false, milliseconds: since(start), detail: `The mail server does not answer: ${reasonOf(error)}` }
      }
    },
    close: () => transport.close(),
  }
}

const since = (start: number) => Math.round(performance.now() - start)

/**
 * RFC 5321 section 4.2.1: 4yz is a failure for now, 5yz for good. A failure to reach the server or to sign in says
 * nothing about the mail, so it is tried again; so is everything that is not understood.
 */
export function classifyMailError(error: unknown, to: string): MailOutcome & { kind: 'temporary' | 'permanent' } {
  const { code, responseCode, response } = (error ?? {}) as { code?: string; responseCode?: number; response?: string }
  const aboutServer = code === 'EAUTH' || code === 'ENOAUTH' || code === 'EOAUTH2' || code === 'ETLS'
  const answered = responseCode !== undefined && responseCode >= 500 && responseCode < 600
  const noRecipient = code === 'EENVELOPE' && responseCode === undefined
  return {
    kind: !aboutServer && (answered || noRecipient) ? 'permanent' : 'temporary',
    code: String(responseCode ?? code ?? 'unknown'),
    detail: withoutAddress(response ?? reasonOf(error), to).slice(0, 300),
  }
}

/** Servers repeat the address in their answers; states and logs hold none. */
function withoutAddress(text: string, to: string): string {
  const pattern = to.replace(/[.*+?^${}()|[\]\\]/g, '\\$&')
  return pattern === '' ? text : text.replace(new RegExp(pattern, 'gi'), '(the address)')
}
