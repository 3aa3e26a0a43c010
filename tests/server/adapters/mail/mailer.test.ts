import { createServer } from 'node:net'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { htmlAlternative } from '#server/adapters/mail/html-alternative.ts'
import {
  classifyMailError,
  createMailer,
  type Mailer,
  messageIdFor,
  type OutgoingMail,
} from '#server/adapters/mail/mailer.ts'
import { type MailFake, startMailFake } from '#server/fakes/mail/mail-fake.ts'

let fake: MailFake
let mailer: Mailer
beforeAll(async () => {
  fake = await startMailFake({ smtpPort: 0, pagePort: 0 })
  mailer = createMailer({ url: fake.smtpUrl, from: 'Evenpenny <draws@site.example>' })
})
afterAll(async () => {
  mailer.close()
  await fake.close()
})

const mail = (to: string, change: Partial<OutgoingMail> = {}): OutgoingMail => ({
  messageId: messageIdFor(['test', to], 'site.example'),
  to,
  subject: 'Your receipt for the Wharfside autumn draw',
  text: 'Your 3 tickets are in.\n\nKeep this: https://site.example/entry/a?b=1&c=2.',
  ...change,
})

async function read(to: string) {
  const response = await fetch(`${fake.url}/mails.json?to=${encodeURIComponent(to)}`)
  return (await response.json()) as {
    number: number
    subject: string
    text: string
    html: string
    messageId: string
    attachments: { name: string; size: number; path: string }[]
  }[]
}

describe('sending', () => {
  it('delivers text, HTML, attachments and the given Message-ID', async () => {
    const content = new TextEncoder().encode('{"kind":"receipt","name":"Zoë"}')
    const attachments = [{ name: 'receipt – Zoë.json', contentType: 'application/json', content }]
    expect(await mailer.send(mail('zoe@home.example', { attachments }))).toEqual({ kind: 'accepted' })
    const [got] = await read('zoe@home.example')
    expect(got).toMatchObject({
      subject: 'Your receipt for the Wharfside autumn draw',
      messageId: messageIdFor(['test', 'zoe@home.example'], 'site.example'),
      attachments: [{ name: 'receipt – Zoë.json', size: content.length }],
    })
    expect(got?.text.trim()).toBe(mail('zoe@home.example').text)
    expect(got?.html).toContain('<a href="https://site.example/entry/a?b=1&amp;c=2"')
    const attached = await fetch(`${fake.url}${got?.attachments[0]?.path}`)
    expect(new Uint8Array(await attached.arrayBuffer())).toEqual(content)
  })

  it('cannot be made to write a header or a second recipient', async () => {
    const subject = 'Hello\r\nBcc: spy@other.example'
    await mailer.send(mail('one@home.example', { subject }))
    expect((await read('one@home.example'))[0]?.subject).toContain('Hello')
    expect(await read('spy@other.example')).toEqual([])
    await mailer.send(mail('two@home.example, spy@other.example'))
    await mailer.send(mail('x <two@home.example>, spy@other.example'))
    expect(await read('spy@other.example')).toEqual([])
  })

  it('tells a recipient who is unknown for good from one to try again', async () => {
    expect(await mailer.send(mail('gone@bounce.example'))).toEqual({
      kind: 'permanent',
      code: '550',
      detail: expect.stringContaining('No such mailbox'),
    })
    expect(await mailer.send(mail('later@busy.example'))).toMatchObject({ kind: 'temporary', code: '451' })
    expect(await mailer.send(mail('later@busy.example'))).toEqual({ kind: 'accepted' })
    expect(await read('gone@bounce.example')).toEqual([])
    expect(await read('later@busy.example')).toHaveLength(1)
  })

  it('calls a server that is away or silent temporary, and its check says so', async () => {
    const away = createMailer({ url: 'smtp://127.0.0.1:9', from: 'a@site.example', timeoutMs: 500 })
    expect(await away.send(mail('a@home.example'))).toMatchObject({ kind: 'temporary' })
    expect(await away.check()).toMatchObject({ ok: false, detail: expect.stringContaining('does not answer') })
    away.close()
    const silent = createServer()
    await new Promise<void>((resolve) => silent.listen(0, '127.0.0.1', resolve))
    const { port } = silent.address() as { port: number }
    const waiting = createMailer({ url: `smtp://127.0.0.1:${port}`, from: 'a@site.example', timeoutMs: 300 })
    expect(await waiting.send(mail('a@home.example'))).toMatchObject({ kind: 'temporary' })
    waiting.close()
    silent.close()
    expect(await mailer.check()).toMatchObject({ ok: true })
  })
})

describe('classifyMailError', () => {
  it.each([
    [{ code: 'EENVELOPE', responseCode: 550 }, 'permanent'],
    [{ code: 'EMESSAGE', responseCode: 554 }, 'permanent'],
    [{ code: 'EENVELOPE', responseCode: 421 }, 'temporary'],
    [{ code: 'EMESSAGE', responseCode: 452 }, 'temporary'],
    // A password that is no longer right is the site's trouble, not the recipient's: nobody's mail is given up for it.
    [{ code: 'EAUTH', responseCode: 535 }, 'temporary'],
    [{ code: 'ECONNECTION' }, 'temporary'],
    [{ code: 'ETIMEDOUT' }, 'temporary'],
    [{ code: 'EENVELOPE' }, 'permanent'],
    [new Error('unheard of'), 'temporary'],
  ])('%o is %s', (error, kind) => {
    expect(classifyMailError(error, 'a@home.example').kind).toBe(kind)
  })

  it('keeps the address out of what is stored', () => {
    const error = { responseCode: 550, response: '550 <A.b@home.example> unknown, a.b@home.example' }
    expect(classifyMailError(error, 'a.b@home.example').detail).toBe('550 <(the address)> unknown, (the address)')
  })
})

describe('messageIdFor', () => {
  it('depends on every part and on where one ends', () => {
    const id = messageIdFor(['seal', '7', '41'], 'site.example')
    expect(id).toMatch(/^<[0-9a-f]{40}@site\.example>$/)
    expect(messageIdFor(['seal', '7', '41'], 'site.example')).toBe(id)
    expect(messageIdFor(['seal', '74', '1'], 'site.example')).not.toBe(id)
  })
})

describe('htmlAlternative', () => {
  it('says the same and nothing live but links', () => {
    const html = htmlAlternative('A <b> & "c"\nline\n\nhttps://site.example/x.')
    expect(html).toContain('A &lt;b&gt; &amp; &quot;c&quot;<br>line')
    expect(html).toContain('<a href="https://site.example/x">https://site.example/x</a>.')
    expect(html).not.toMatch(/<(script|img|link)/)
  })
})
