import type { Express } from 'express'
import type { Services } from '#server/services.ts'
import { signedHead } from '#server/store/queries/log-head.ts'

/** `/log/checkpoint.txt`: the head of the log as the signed note that witnesses and monitors read. */
export function mountLogFiles(app: Express, services: Pick<Services, 'db' | 'sha256' | 'signing' | 'site'>): void {
  app.get('/log/checkpoint.txt', async (_request, response) => {
    const { note } = await signedHead(services.db, services)
    response.setHeader('Cache-Control', 'no-cache')
    response.setHeader('Access-Control-Allow-Origin', '*')
    response.setHeader('Cross-Origin-Resource-Policy', 'cross-origin')
    response.type('text/plain; charset=utf-8').send(note)
  })
}
