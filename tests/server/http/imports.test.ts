import { createServer, type Server } from 'node:http'
import { connect, type AddressInfo } from 'node:net'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { openRow } from '#tests/support/rows.ts'
import { startWebSite, type WebSite } from '#tests/support/web-site.ts'

let site: WebSite
let client: Awaited<ReturnType<WebSite['client']>>
let draw: string
let server: Server
let cookie: string

beforeAll(async () => {
  site = await startWebSite()
  const row = await openRow(site.database.pool)
  draw = row.drawId
  const organiser = await site.person()
  await site.member(row.organisationId, organiser.id, 'organiser')
  client = await site.client(organiser.email)
  const signedIn = await client.post('/api/session').send({ email: organiser.email, password: 'three unrelated words' })
  cookie = String(signedIn.headers['set-cookie']).split(';')[0] ?? ''
  server = createServer(site.listener).listen(0, '127.0.0.1')
  await new Promise((done) => server.once('listening', done))
})
afterAll(async () => {
  await new Promise((done) => server.close(done))
  await site.close()
})

const upload = (text: string, name = 'stubs.csv') =>
  client.post(`/api/office/draws/${draw}/imports`).attach('file', Buffer.from(text), name)
const stored = async () =>
  (
    await site.database.pool.query<{ entrants: number; staged: number }>(
      `select (select count(*)::int from entrant where draw_id = $1) as entrants,
         (select count(*)::int from import_row r join entrant_import i on i.id = r.import_id where i.draw_id = $1) as staged`,
      [draw],
    )
  ).rows[0]

describe('importing entrants', () => {
  it('reads and checks a file, stores nothing in the list, and brings it in when told to', async () => {
    const before = await stored()
    const read = await upload('name,tickets,email\nTove Lind,3,tove@group.example\nOle Brandt,2,\n')
    expect(read.status).toBe(200)
    expect(read.body).toMatchObject({ state: 'ready', entrants: 2, tickets: 5, errorCount: 0, fileName: 'stubs.csv' })
    expect((await stored())?.entrants).toBe(before?.entrants)
    const path = `/api/office/draws/${draw}/imports/${read.body.id}`
    expect((await client.get(path)).body.preview).toHaveLength(2)
    expect((await client.post(`${path}/apply`)).body.state).toBe('applied')
    expect((await stored())?.entrants).toBe((before?.entrants ?? 0) + 2)
    const listed = await client.get(`/api/office/draws/${draw}/entrants?q=tove`)
    expect(listed.body.items).toMatchObject([{ name: 'Tove Lind', tickets: 3, source: 'import' }])
  })

  it('answers faults with their rows and keeps nothing', async () => {
    const before = await stored()
    const read = await upload('name,tickets\nTove Lind,0\nOle Brandt,2\n')
    expect(read.status).toBe(200)
    expect(read.body).toMatchObject({ state: 'faulty', errors: [{ row: 2, column: 'tickets' }] })
    expect(await stored()).toEqual(before)
    expect((await client.post(`/api/office/draws/${draw}/imports/${read.body.id}/apply`)).status).toBe(409)
  })

  it.each([
    [
      'of another encoding',
      Buffer.from('name,tickets\nJos\xe9 Lind,3\n', 'latin1'),
      /^Row 2: here the file is no longer UTF-8/,
    ],
    [
      'of 16-bit text',
      Buffer.from('\ufeffname,tickets\nTove,3\n', 'utf16le'),
      /^Row 1: here the file is no longer UTF-8/,
    ],
    [
      'with a quotation mark that never closes, far before its end',
      Buffer.from(`name,tickets\nOle,1\n"Tove,3\n${'Ole Brandt,2\n'.repeat(50_000)}`),
      /^Row 3: the row is longer than 65,536 characters. A quotation mark/,
    ],
  ])('answers a file %s with its row, and reads no further', async (_what, bytes, words) => {
    const before = await stored()
    const read = await client.post(`/api/office/draws/${draw}/imports`).attach('file', bytes, 'stubs.csv')
    expect(read.status).toBe(200)
    expect(read.body).toMatchObject({ state: 'faulty', errorCount: 1 })
    expect(read.body.errors[0].message).toMatch(words)
    expect(await stored()).toEqual(before)
  })

  it('stores nothing of half an upload, and says so where its progress is asked for', async () => {
    const before = await stored()
    const socket = connect((server.address() as AddressInfo).port, '127.0.0.1')
    socket.write(
      `POST /api/office/draws/${draw}/imports HTTP/1.1\r\nHost: x\r\nCookie: ${cookie}\r\n` +
        'Content-Type: multipart/form-data; boundary=x\r\nContent-Length: 5000000\r\n\r\n' +
        '--x\r\nContent-Disposition: form-data; name="file"; filename="half.csv"\r\n\r\nname,tickets\n' +
        Array.from({ length: 20_000 }, (_, index) => `Person ${index},2\n`).join(''),
    )
    const progress = async () => {
      const listed = await client.get(`/api/office/draws/${draw}/imports`)
      return (listed.body as { fileName: string; state: string; failure: string | null }[]).find(
        ({ fileName }) => fileName === 'half.csv',
      )
    }
    await expect.poll(async () => (await progress())?.state, { timeout: 5000 }).toBe('reading')
    socket.destroy()
    await expect.poll(async () => (await progress())?.state, { timeout: 5000 }).toBe('failed')
    expect((await progress())?.failure).toContain('Nothing was stored')
    expect(await stored()).toEqual(before)
  })

  it('refuses whoever may not import before the file is read', async () => {
    const stranger = await site.person()
    const answer = await (await site.client(stranger.email))
      .post(`/api/office/draws/${draw}/imports`)
      .attach('file', Buffer.from('name,tickets\nX,1\n'), 'a.csv')
    expect(answer.status).toBe(404)
    const { rows } = await site.database.pool.query(`select from entrant_import where file_name = 'a.csv'`)
    expect(rows).toHaveLength(0)
  })
})
