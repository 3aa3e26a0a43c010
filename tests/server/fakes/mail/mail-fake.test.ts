import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { createTransport } from 'nodemailer'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type MailFake, startMailFake } from '#server/fakes/mail/mail-fake.ts'

const folder = mkdtempSync(join(tmpdir(), 'evenpenny-mail-'))
const start = () => startMailFake({ smtpPort: 0, pagePort: 0, folder })
let fake: MailFake
beforeAll(async () => {
  fake = await start()
})
afterAll(async () => {
  await fake.close()
  rmSync(folder, { recursive: true, force: true })
})

async function send(to: string, subject: string, more: object = {}) {
  const transport = createTransport(fake.smtpUrl)
  await transport.sendMail({
    from: 'site@site.example',
    to,
    subject,
    text: 'Hello',
    messageId: `<${subject}@site.example>`,
    ...more,
  })
  transport.close()
}

const page = async (path: string) => {
  const response = await fetch(`${fake.url}${path}`)
  return { status: response.status, headers: response.headers, text: await response.text() }
}

describe('the page of mails', () => {
  it('lists mails newest first, whole or for one recipient', async () => {
    await send('ann@home.example', 'first')
    await send('Ben@home.example', 'second')
    await send('ann@home.example', 'third')
    const { text } = await page('/')
    const order = ['third', 'second', 'first'].map((subject) => text.indexOf(`>${subject}</a>`))
    expect(order.every((at) => at > 0)).toBe(true)
    expect([...order].sort((a, b) => a - b)).toEqual(order)
    expect(text).toContain('&lt;third@site.example&gt;')
    const anns = (await page('/?to=ann@home.example')).text
    expect([anns.includes('>third</a>'), anns.includes('>second</a>')]).toEqual([true, false])
    expect((await page('/?to=ben@home.example')).text).toContain('One mail to ben@home.example')
  })

  it('keeps the same mail sent twice as two', async () => {
    await send('twice@home.example', 'again')
    await send('twice@home.example', 'again')
    expect(fake.store.list('twice@home.example').map((mail) => mail.messageId)).toEqual([
      '<again@site.example>',
      '<again@site.example>',
    ])
  })

  it('shows a mail with live links and lets nothing in it run', async () => {
    await send('cleo@home.example', '<script>alert(1)</script>', {
      text: 'Go to https://site.example/set-password?token=abc.\n<img src=x>',
      html: '<script>alert(2)</script>',
    })
    const [mail] = fake.store.list('cleo@home.example')
    const { text, headers } = await page(`/mails/${mail?.number}`)
    expect(text).toContain('<a href="https://site.example/set-password?token=abc">')
    expect(text).not.toMatch(/<script|<img/)
    expect(text).toContain('&lt;script&gt;alert(1)')
    expect(headers.get('content-security-policy')).toContain("default-src 'none'")
    const html = await page(`/mails/${mail?.number}/html`)
    expect(html.headers.get('content-security-policy')).toMatch(/^sandbox /)
    expect((await page(`/mails/${mail?.number}/raw`)).text).toContain('Message-ID: <')
  })

  it('hands out attachments by their names', async () => {
    const content = Buffer.from([0, 1, 2, 255])
    await send('dee@home.example', 'file', { attachments: [{ filename: 'récépissé "1".bin', content }] })
    const [mail] = fake.store.list('dee@home.example')
    const response = await fetch(`${fake.url}/mails/${mail?.number}/attachments/0`)
    expect(response.headers.get('content-disposition')).toBe(
      "attachment; filename*=UTF-8''r%C3%A9c%C3%A9piss%C3%A9%20%221%22.bin",
    )
    expect(Buffer.from(await response.arrayBuffer())).toEqual(content)
    expect((await page(`/mails/${mail?.number}/attachments/1`)).status).toBe(404)
  })

  it('answers 404 for what is not there and takes no writes', async () => {
    for (const path of ['/mails/999', '/mails/0', '/mails/../index.jsonl', '/other'])
      expect((await page(path)).status).toBe(404)
    expect((await fetch(fake.url, { method: 'POST' })).status).toBe(405)
  })
})

describe('a restart', () => {
  it('keeps the mails as they were sent and goes on counting', async () => {
    const before = fake.store.list()
    await fake.close()
    fake = await start()
    expect(fake.store.list()).toEqual(before)
    await send('eve@home.example', 'after')
    expect(fake.store.list()[0]?.number).toBe((before[0]?.number ?? 0) + 1)
    expect(readFileSync(join(folder, '0001.eml'), 'utf8')).toContain('Subject: first')
  })
})
