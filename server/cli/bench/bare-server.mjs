// A bare node:http server that sends the same bytes to everybody: the yardstick for the site's result page. Its standard
// input brings the answer as one line of JSON; it prints its port, and ends when its input does.
import { createServer } from 'node:http'
import { createInterface } from 'node:readline'

const lines = createInterface({ input: process.stdin })
lines.once('line', (line) => {
  const { headers, body } = JSON.parse(line)
  const bytes = Buffer.from(body, 'base64')
  const server = createServer((_request, response) => {
    response.writeHead(200, headers)
    response.end(bytes)
  })
  server.listen(0, '127.0.0.1', () => console.log(server.address().port))
})
lines.once('close', () => process.exit(0))
