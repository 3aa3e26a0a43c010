import { createServer, request as httpRequest, type Server } from 'node:http'
import { connect, type AddressInfo } from 'node:net'
import express from 'express'
import request from 'supertest'
import { afterEach, describe, expect, it } from 'vitest'
import type { Upload } from '#server/http/endpoints/context.ts'
import { receiveUpload, uploadAnswer } from '#server/http/endpoints/upload.ts'
import { errorHandler } from '#server/http/middleware/errors.ts'
import { createProblemOf } from '#server/http/problem-of.ts'

const LIMIT = 100_000
let server: Server | undefined
afterEach(() => new Promise((done) => (server ? server.close(done) : done(undefined))))

interface Seen {
  outcome?: string
  bytes: number
  fileName?: string
  largest: number
}

/** An application that reads an upload to its end and tells what it saw. */
function receiving(seen: Seen, finished: () => void = () => {}) {
  const app = express()
  const receive = async (_request: unknown, upload: Upload) => {
    seen.fileName = upload.fileName
    try {
      for await (const chunk of upload.bytes) {
        seen.bytes += chunk.length
        seen.largest = Math.max(seen.largest, chunk.length)
      }
      seen.outcome = 'whole'
      return { bytes: seen.bytes }
    } catch (error) {
      seen.outcome = 'broken'
      throw error
    } finally {
      finished()
    }
  }
  app.post('/', ...receiveUpload(receive, LIMIT), (asked, response) => void response.json(uploadAnswer(asked)))
  app.use(errorHandler(createProblemOf(() => undefined)))
  return app
}

const nothing = (): Seen => ({ bytes: 0, largest: 0 })

describe('receiveUpload', () => {
  it('streams the file and answers with what its reader says', async () => {
    const seen = nothing()
    const answer = await request(receiving(seen)).post('/').attach('file', Buffer.alloc(LIMIT, 'a'), 'Größe "1".csv')
    expect(answer.status).toBe(200)
    expect(answer.body).toEqual({ bytes: LIMIT })
    expect(seen.fileName).toBe('Größe "1".csv')
    expect(seen.largest).toBeLessThan(LIMIT)
  })

  it('refuses one byte more than the limit with 413, and its reader never sees a whole file', async () => {
    const seen = nothing()
    const answer = await request(receiving(seen))
      .post('/')
      .attach('file', Buffer.alloc(LIMIT + 1, 'a'), 'a.csv')
    expect(answer.status).toBe(413)
    expect(answer.type).toBe('application/problem+json')
    expect(answer.body).toMatchObject({ errors: [{ field: 'file', message: 'Choose a file of at most 200 MB.' }] })
    expect(seen.outcome).toBe('broken')
  })

  it('refuses a stated length far beyond the limit before anything is read', async () => {
    const seen = nothing()
    server = createServer(receiving(seen)).listen(0, '127.0.0.1')
    await new Promise((done) => server?.once('listening', done))
    const { port } = server.address() as AddressInfo
    const status = await new Promise<number | undefined>((resolve, reject) => {
      const asking = httpRequest(
        {
          port,
          host: '127.0.0.1',
          method: 'POST',
          headers: { 'content-type': 'multipart/form-data; boundary=x', 'content-length': 300_000_000 },
        },
        (response) => {
          resolve(response.statusCode)
          asking.destroy()
        },
      )
      asking.on('error', reject)
      asking.flushHeaders()
    })
    expect(status).toBe(413)
    expect(seen).toEqual(nothing())
  })

  it('breaks its reader off where the sender goes away half-way', async () => {
    const seen = nothing()
    let finished = () => {}
    const done = new Promise<void>((resolve) => (finished = resolve))
    server = createServer(receiving(seen, finished)).listen(0, '127.0.0.1')
    await new Promise((ready) => server?.once('listening', ready))
    const socket = connect((server.address() as AddressInfo).port, '127.0.0.1')
    socket.write(
      'POST / HTTP/1.1\r\nHost: x\r\nContent-Type: multipart/form-data; boundary=x\r\nContent-Length: 50000\r\n\r\n' +
        '--x\r\nContent-Disposition: form-data; name="file"; filename="a.csv"\r\nContent-Type: text/csv\r\n\r\nname,tickets\nIda,4\n',
    )
    await new Promise((later) => setTimeout(later, 100))
    socket.destroy()
    await done
    expect(seen.outcome).toBe('broken')
  })

  it('refuses a form that ends in the middle of the file', async () => {
    const seen = nothing()
    const answer = await request(receiving(seen))
      .post('/')
      .set('Content-Type', 'multipart/form-data; boundary=x')
      .send('--x\r\nContent-Disposition: form-data; name="file"; filename="a.csv"\r\n\r\nname,tickets\nIda,4\n')
    expect(answer.status).toBe(400)
    expect(answer.body.detail).toContain('Nothing was stored')
    expect(seen.outcome).toBe('broken')
  })

  it('says what is missing where no file comes, or under another name, or not as a form', async () => {
    const app = receiving(nothing())
    const empty = await request(app).post('/').field('other', 'x')
    const misnamed = await request(app).post('/').attach('upload', Buffer.from('x'), 'a.csv')
    for (const answer of [empty, misnamed]) {
      expect(answer.status).toBe(422)
      expect(answer.body.errors).toEqual([{ field: 'file', message: 'Choose a CSV file.' }])
    }
    expect((await request(app).post('/').send({ file: 'x' })).status).toBe(415)
  })

  it.each([10, 60_000])('answers a reader that has seen enough after the first piece of %i bytes', async (length) => {
    const app = express()
    const receive = async (_request: unknown, upload: Upload) => {
      for await (const chunk of upload.bytes) if (chunk.length > 0) break
      return { enough: true, broken: upload.signal.aborted }
    }
    app.post('/', ...receiveUpload(receive, LIMIT), (asked, response) => void response.json(uploadAnswer(asked)))
    app.use(errorHandler(createProblemOf(() => undefined)))
    const answer = await request(app).post('/').attach('file', Buffer.alloc(length, 'a'), 'a.csv')
    expect([answer.status, answer.body]).toEqual([200, { enough: true, broken: false }])
  })

  it('passes on what its reader throws', async () => {
    const app = express()
    app.post('/', ...receiveUpload(() => Promise.reject(new URIError('no')), LIMIT))
    app.use(errorHandler(createProblemOf(() => undefined)))
    const answer = await request(app).post('/').attach('file', Buffer.alloc(50_000, 'a'), 'a.csv')
    expect(answer.status).toBe(400)
  })
})
