import { createHash } from 'node:crypto'
import { createWriteStream } from 'node:fs'
import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { Transform } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import { openFileSource } from '#server/adapters/archive/file-source.ts'
import { inflateWithZlib } from '#server/adapters/archive/zlib-codec.ts'
import type { ObjectStore } from '#server/adapters/object-store/object-store.ts'
import { openZip, type ZipSource } from '#shared/archive/zip-reader.ts'

interface OpenArchive {
  readonly zip: ZipSource
  close(): Promise<void>
}

interface Held {
  readonly opened: Promise<OpenArchive>
  users: number
  usedAt: number
}

const KEPT = 24
const MAX_KEPT_BYTES = 4 * 1024 ** 3

/** Locked archives as files of this process, fetched from the object store once each; the least used are let go of. */
export class LockedArchives {
  readonly #store: ObjectStore
  readonly #held = new Map<string, Held & { readonly bytes: number }>()
  #folder: Promise<string> | null = null

  constructor(store: ObjectStore) {
    this.#store = store
  }

  /**
   * Runs `work` on an archive and keeps it open meanwhile. Throws where the store does not give it, or gives something
   * with another digest.
   */
  async use<T>(
    row: { readonly key: string; readonly sha256: string; readonly bytes: number },
    work: (zip: ZipSource) => Promise<T>,
  ): Promise<T> {
    const held = this.#hold(row)
    held.users++
    try {
      return await work((await held.opened).zip)
    } finally {
      held.users--
      held.usedAt = performance.now()
      await this.#letGo()
    }
  }

  async close(): Promise<void> {
    for (const [sha256, held] of [...this.#held]) {
      this.#held.delete(sha256)
      await held.opened.then((archive) => archive.close()).catch(() => undefined)
    }
    if (this.#folder) await rm(await this.#folder, { recursive: true, force: true })
  }

  #hold(row: { readonly key: string; readonly sha256: string; readonly bytes: number }): Held {
    const known = this.#held.get(row.sha256)
    if (known) return known
    const opened = this.#fetch(row.key, row.sha256)
    const held = { opened, users: 0, usedAt: performance.now(), bytes: row.bytes }
    this.#held.set(row.sha256, held)
    opened.catch(() => {
      if (this.#held.get(row.sha256) === held) this.#held.delete(row.sha256)
    })
    return held
  }

  async #letGo(): Promise<void> {
    const idle = [...this.#held].filter(([, held]) => held.users === 0).sort(([, a], [, b]) => a.usedAt - b.usedAt)
    let bytes = [...this.#held.values()].reduce((sum, held) => sum + held.bytes, 0)
    for (const [sha256, held] of idle) {
      if (this.#held.size <= KEPT && bytes <= MAX_KEPT_BYTES) return
      this.#held.delete(sha256)
      bytes -= held.bytes
      await held.opened.then((archive) => archive.close()).catch(() => undefined)
    }
  }

  async #fetch(key: string, sha256: string): Promise<OpenArchive> {
    this.#folder ??= mkdtemp(join(tmpdir(), 'evenpenny-archives-'))
    const path = join(await this.#folder, `${sha256}.zip`)
    const found = await this.#store.get(key)
    if (!found) throw new Error(`The object store has no ${key}.`)
    const hash = createHash('sha256')
    const hashing = new Transform({
      transform(chunk: Buffer, _encoding, done) {
        hash.update(chunk)
        done(null, chunk)
      },
    })
    await pipeline(found.stream, hashing, createWriteStream(path, { mode: 0o600 }))
    if (hash.digest('hex') !== sha256) throw new Error(`What the object store gives for ${key} is not what was stored.`)
    const source = await openFileSource(path)
    const close = async () => {
      await source.close()
      await rm(path, { force: true })
    }
    try {
      return { zip: await openZip(source, { inflate: inflateWithZlib }), close }
    } catch (error) {
      await close()
      throw error
    }
  }
}
