import type { Server } from 'node:http'
import type { AddressInfo } from 'node:net'

/** Every fake listens on loopback only: none of them guards anything that others may reach. */
export const loopback = '127.0.0.1'

/** Listens, and closes without waiting for clients that keep their connections open. */
export async function listenOnLoopback(server: Server, port: number): Promise<{ url: string; close(): Promise<void> }> {
  await new Promise<void>((resolve, reject) => {
    server.once('error', reject)
    server.listen(port, loopback, resolve)
  })
  const { port: taken } = server.address() as AddressInfo
  return {
    url: `http://${loopback}:${taken}`,
    close: () =>
      new Promise((resolve) => {
        server.close(() => resolve())
        server.closeAllConnections()
      }),
  }
}
