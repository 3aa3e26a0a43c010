import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { mkdtempSync, rmSync } from 'node:fs'
import { createServer } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { GetObjectCommand, PutObjectCommand } from '@aws-sdk/client-s3'
import { createTransport } from 'nodemailer'
import { afterAll, describe, expect, it } from 'vitest'
import { systemClock } from '#server/adapters/clock/clock.ts'
import { createTimestamper } from '#server/adapters/timestamp/timestamper.ts'
import { DEVELOPMENT_CHAIN } from '#shared/protocol/networks.ts'
import { DEVELOPMENT_AUTHORITY } from '#shared/timestamp/development-authority.ts'
import { clientFor } from './s3/s3-client.ts'

const data = mkdtempSync(join(tmpdir(), 'evenpenny-fakes-'))
const running: ChildProcess[] = []
afterAll(() => {
  for (const child of running) child.kill('SIGKILL')
  rmSync(data, { recursive: true, force: true })
})

const ports = ['S3', 'SMTP', 'MAIL_PAGE', 'BEACON', 'TIMESTAMP'].map((name) => `EVENPENNY_FAKE_${name}_PORT`)

/** Runs the fakes as npm start does, on free ports; gives what they print until they are ready or end. */
async function run(env: Record<string, string> = {}) {
  const child = spawn(process.execPath, ['--import', 'tsx', 'server/fakes/main.ts'], {
    env: {
      PATH: process.env.PATH,
      EVENPENNY_DATA: data,
      ...Object.fromEntries(ports.map((name) => [name, '0'])),
      ...env,
    },
  })
  running.push(child)
  let output = ''
  const ended = once(child, 'exit').then(([code]) => code as number | null)
  const ready = new Promise<void>((resolve) => {
    for (const stream of [child.stdout, child.stderr])
      stream.on('data', (piece: Buffer) => {
        output += piece.toString()
        if (output.includes('fakes ready')) resolve()
      })
  })
  await Promise.race([ready, ended])
  const found = (pattern: RegExp) => pattern.exec(output)?.[1] ?? ''
  return {
    output,
    ended,
    s3: found(/object store (\S+)/),
    smtp: found(/mail server (\S+),/),
    page: found(/read at (\S+)/),
    beacon: found(/beacon (\S+)/),
    timestamp: found(/timestamp authority (\S+)/),
    stop: () => {
      child.kill('SIGTERM')
      return ended
    },
  }
}

const credentials = { accessKeyId: 'evenpenny-local', secretAccessKey: 'evenpenny-local-secret' }

describe('the process of all fakes', () => {
  it('serves all five, stops when asked, and has the same data after a restart', async () => {
    const first = await run()
    const client = clientFor(first.s3, { credentials })
    await client.send(new PutObjectCommand({ Bucket: 'evenpenny', Key: 'kept', Body: 'over a restart' }))
    client.destroy()
    const transport = createTransport(first.smtp)
    await transport.sendMail({ from: 'a@site.example', to: 'b@home.example', subject: 'Kept', text: 'too' })
    transport.close()
    const round = await (await fetch(`${first.beacon}/${DEVELOPMENT_CHAIN.chain}/public/1`)).json()
    expect(round.round).toBe(1)
    expect((await fetch(`${first.beacon}/control`, { method: 'POST', body: '{}' })).status).not.toBe(200)
    const timestamper = createTimestamper({
      urls: [first.timestamp],
      trusted: [DEVELOPMENT_AUTHORITY],
      clock: systemClock,
    })
    expect(await timestamper.stamp(new Uint8Array(32))).toMatchObject({ kind: 'stamped' })
    expect((await fetch(`${first.timestamp}/control`, { method: 'POST', body: '{}' })).status).not.toBe(200)
    expect(await first.stop()).toBe(0)

    const second = await run()
    const again = clientFor(second.s3, { credentials })
    const got = await again.send(new GetObjectCommand({ Bucket: 'evenpenny', Key: 'kept' }))
    expect(await got.Body?.transformToString()).toBe('over a restart')
    again.destroy()
    const mails = await (await fetch(`${second.page}/mails.json?to=b@home.example`)).json()
    expect(mails).toMatchObject([{ subject: 'Kept' }])
    expect(await second.stop()).toBe(0)
  })

  it('says which port is taken and which variable moves it', async () => {
    const other = createServer().listen(0, '127.0.0.1')
    await once(other, 'listening')
    const { port } = other.address() as { port: number }
    const failed = await run({ EVENPENNY_FAKE_BEACON_PORT: String(port) })
    expect(await failed.ended).toBe(1)
    expect(failed.output).toContain('The local beacon cannot start. Its port is taken.')
    expect(failed.output).toContain('EVENPENNY_FAKE_BEACON_PORT')
    other.close()
    const wrong = await run({ EVENPENNY_FAKE_S3_PORT: 'http' })
    expect(await wrong.ended).toBe(1)
    expect(wrong.output).toContain('EVENPENNY_FAKE_S3_PORT must be a port')
  })
})
