import { mkdtempSync, rmSync } from 'node:fs'
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { simpleParser } from 'mailparser'
import { listenOnLoopback, loopback } from '../loopback.ts'
import { MailStore } from './mail-store.ts'
import { attachmentName, listPage, mailPage, notFoundPage } from './page.ts'
import { startSmtp, type Verdict } from './smtp.ts'

export interface MailFakeOptions {
  /** 0 takes a free port. */
  readonly smtpPort: number
  readonly pagePort: number
  /** Where mails are kept; without it in a temporary folder that goes with the fake. */
  readonly folder?: string
  readonly now?: () => Date
  readonly verdict?: (address: string) => Verdict
}

export interface MailFake {
  /** smtp://… for nodemailer. */
  readonly smtpUrl: string
  /** The page to read mails on. */
  readonly url: string
  readonly store: MailStore
  close(): Promise<void>
}

const types = { html: 'text/html; charset=utf-8', json: 'application/json', text: 'text/plain; charset=utf-8' }

// Nothing but our own style may apply or load, whatever a mail holds.
const policy =
  "default-src 'none'; style-src 'unsafe-inline'; form-action 'self'; frame-ancestors 'none'; base-uri 'none'"

/** A mail server on loopback, and a page to read what it got: `/`, `/mails/:n`, `/mails.json?to=`. */
export async function startMailFake(options: MailFakeOptions): Promise<MailFake> {
  const folder = options.folder ?? mkdtempSync(join(tmpdir(), 'evenpenny-mail-'))
  const store = new MailStore(folder)
  const smtp = await startSmtp({
    port: options.smtpPort,
    store,
    ...(options.now ? { now: options.now } : {}),
    ...(options.verdict ? { verdict: options.verdict } : {}),
  })
  const server = createServer((req, res) => {
    answer(store, req, res).catch((error: unknown) => {
      if (!res.headersSent) send(res, 500, types.text, error instanceof Error ? error.message : 'It failed.')
      else res.destroy()
    })
  })
  const listening = await listenOnLoopback(server, options.pagePort).catch(async (error: unknown) => {
    await smtp.close()
    throw error
  })
  return {
    smtpUrl: `smtp://${loopback}:${smtp.port}`,
    url: listening.url,
    store,
    close: async () => {
      await Promise.all([smtp.close(), listening.close()])
      if (options.folder === undefined) rmSync(folder, { recursive: true, force: true })
    },
  }
}

function send(
  res: ServerResponse,
  status: number,
  type: string,
  body: string | Buffer,
  more: Record<string, string> = {},
) {
  res.writeHead(status, {
    'content-type': type,
    'content-security-policy': policy,
    'x-content-type-options': 'nosniff',
    'referrer-policy': 'no-referrer',
    'cache-control': 'no-store',
    ...more,
  })
  res.end(body)
}

async function answer(store: MailStore, req: IncomingMessage, res: ServerResponse): Promise<void> {
  const { pathname, searchParams } = new URL(req.url ?? '/', `http://${loopback}`)
  if (req.method !== 'GET' && req.method !== 'HEAD') {
    send(res, 405, types.text, 'Only reading is possible here.', { allow: 'GET, HEAD' })
    return
  }
  const to = searchParams.get('to') ?? ''
  if (pathname === '/') return send(res, 200, types.html, listPage(store.list(to), to))
  if (pathname === '/mails.json') return send(res, 200, types.json, JSON.stringify(await mailsWithText(store, to)))
  const [, number, part, index] = /^\/mails\/(\d+)(?:\/(raw|html|attachments\/(\d+)))?$/.exec(pathname) ?? []
  const mail = number === undefined ? undefined : store.find(Number(number))
  if (!mail) return send(res, 404, types.html, notFoundPage())
  const raw = store.raw(mail)
  if (part === 'raw') return send(res, 200, types.text, raw)
  const parsed = await simpleParser(raw)
  if (part === undefined) return send(res, 200, types.html, mailPage(mail, parsed))
  if (part === 'html' && typeof parsed.html === 'string')
    return send(res, 200, types.html, parsed.html, { 'content-security-policy': `sandbox allow-popups; ${policy}` })
  const attachment = parsed.attachments[Number(index)]
  if (index === undefined || !attachment) return send(res, 404, types.html, notFoundPage())
  const name = encodeURIComponent(attachmentName(attachment, Number(index))).replaceAll("'", '%27')
  send(res, 200, attachment.contentType, attachment.content, {
    'content-disposition': `attachment; filename*=UTF-8''${name}`,
  })
}

/** The list for browser tests: what the index tells, with each mail's text and the addresses of its attachments. */
async function mailsWithText(store: MailStore, to: string) {
  return Promise.all(
    store.list(to).map(async (mail) => {
      const parsed = await simpleParser(store.raw(mail))
      return {
        ...mail,
        text: parsed.text ?? '',
        html: typeof parsed.html === 'string' ? parsed.html : null,
        attachments: parsed.attachments.map((attachment, index) => ({
          name: attachmentName(attachment, index),
          contentType: attachment.contentType,
          size: attachment.size,
          path: `/mails/${mail.number}/attachments/${index}`,
        })),
      }
    }),
  )
}
