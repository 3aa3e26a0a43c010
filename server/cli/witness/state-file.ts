import { open, readFile, rename } from 'node:fs/promises'
import { dirname } from 'node:path'
import { z } from 'zod'
import { fromHex, toHex } from '#shared/bytes/hex.ts'

/** The checkpoint of a log that a witness cosigned last. */
export interface Seen {
  readonly size: number
  readonly root: Uint8Array
}

const record = z.record(
  z.string(),
  z.strictObject({ size: z.number().int().nonnegative(), root: z.string().regex(/^[0-9a-f]{64}$/) }),
)

/** What a witness remembers of each log, in a file that is whole at any time. */
export class StateFile {
  readonly #path: string
  readonly #seen: Map<string, Seen>

  private constructor(path: string, seen: Map<string, Seen>) {
    this.#path = path
    this.#seen = seen
  }

  /** Reads the file; where there is none, nothing was seen. Throws an Error for a file that is no such record. */
  static async open(path: string): Promise<StateFile> {
    const text = await readFile(path, 'utf8').catch((error: NodeJS.ErrnoException) => {
      if (error.code === 'ENOENT') return '{}'
      throw error
    })
    let seen: z.infer<typeof record>
    try {
      seen = record.parse(JSON.parse(text))
    } catch {
      throw new Error(`${path} is not what a witness remembers. Put it back from a copy: a witness must not forget.`)
    }
    const entries = Object.entries(seen).map(([origin, { size, root }]): [string, Seen] => [
      origin,
      { size, root: fromHex(root, 32) ?? new Uint8Array(32) },
    ])
    return new StateFile(path, new Map(entries))
  }

  get(origin: string): Seen | null {
    return this.#seen.get(origin) ?? null
  }

  /** Remembers a checkpoint; resolves once it is on the disk. */
  async put(origin: string, seen: Seen): Promise<void> {
    const next = new Map(this.#seen).set(origin, seen)
    const record = Object.fromEntries([...next].map(([name, { size, root }]) => [name, { size, root: toHex(root) }]))
    const draft = `${this.#path}.new`
    const file = await open(draft, 'w', 0o600)
    try {
      await file.writeFile(`${JSON.stringify(record, null, 2)}\n`)
      await file.sync()
    } finally {
      await file.close()
    }
    await rename(draft, this.#path)
    const folder = await open(dirname(this.#path), 'r')
    await folder.sync().finally(() => folder.close())
    this.#seen.set(origin, seen)
  }
}
