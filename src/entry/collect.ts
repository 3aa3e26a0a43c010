/**
 * A destination that React can write to, which keeps what is written: enough of Node's writable stream for
 * renderToPipeableStream, without reaching for Node's own modules in code that is also built for browsers.
 */
export function collector(done: (text: string) => void, failed: (error: unknown) => void): NodeJS.WritableStream {
  const decoder = new TextDecoder()
  let text = ''
  const keep = (chunk: unknown) => {
    // React reuses its buffers: decode at once.
    if (typeof chunk === 'string') text += chunk
    else if (chunk instanceof Uint8Array) text += decoder.decode(chunk, { stream: true })
  }
  const sink = {
    writable: true,
    write(chunk: unknown) {
      keep(chunk)
      return true
    },
    end(chunk?: unknown) {
      keep(chunk)
      done(text + decoder.decode())
      return sink
    },
    destroy(error?: unknown) {
      failed(error ?? new Error('rendering was broken off'))
      return sink
    },
    on: () => sink,
  }
  return sink as unknown as NodeJS.WritableStream
}
