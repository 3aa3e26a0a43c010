/** Rows on their way from a reader to a writer: the reader waits while the writer is behind. */
export class RowChannel<T> implements AsyncIterable<T> {
  private waiting: T[] = []
  private ended = false
  private failure: { readonly error: unknown } | null = null
  private wakeReader: (() => void) | null = null
  private wakeWriter: (() => void) | null = null

  constructor(private readonly capacity = 4000) {}

  /** Hands over a row; a promise where the writer is behind. Throws once the channel has failed. */
  push(row: T): void | Promise<void> {
    if (this.failure) throw this.failure.error
    this.waiting.push(row)
    this.wakeWriter?.()
    if (this.waiting.length >= this.capacity) return this.room()
  }

  end(): void {
    this.ended = true
    this.wakeWriter?.()
  }

  fail(error: unknown): void {
    this.failure ??= { error }
    this.wakeWriter?.()
    this.wakeReader?.()
  }

  async *[Symbol.asyncIterator](): AsyncIterator<T> {
    for (;;) {
      if (this.failure) throw this.failure.error
      const rows = this.waiting
      this.waiting = []
      this.wakeReader?.()
      yield* rows
      if (this.waiting.length > 0 || this.failure) continue
      if (this.ended) return
      await new Promise<void>((resolve) => {
        this.wakeWriter = resolve
      })
      this.wakeWriter = null
    }
  }

  private async room(): Promise<void> {
    await new Promise<void>((resolve) => {
      this.wakeReader = resolve
    })
    this.wakeReader = null
    if (this.failure) throw this.failure.error
  }
}
