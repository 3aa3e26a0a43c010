import { createHash } from 'node:crypto'
import { appendFileSync, existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'

/** One delivered mail, as the index tells of it. */
export interface StoredMail {
  /** Place in the order of arrival, from 1: the mail's address on the page. */
  readonly number: number
  /** ISO 8601, UTC. */
  readonly receivedAt: string
  /** The envelope's recipients, lower case: who really gets it. */
  readonly to: readonly string[]
  readonly from: string
  readonly subject: string
  readonly messageId: string
  /** Names of the attachments, in order. */
  readonly attachments: readonly string[]
  readonly sha256: string
}

/** Keeps every mail as it came in (`0001.eml`) and a line about each in `index.jsonl`. The same mail twice is two. */
export class MailStore {
  private readonly mails: StoredMail[] = []

  constructor(private readonly folder: string) {
    mkdirSync(folder, { recursive: true })
    const index = join(folder, 'index.jsonl')
    if (!existsSync(index)) return
    for (const line of readFileSync(index, 'utf8').split('\n')) {
      // A line cut short by a crash belongs to a mail that was never accepted.
      const mail = parseLine(line)
      if (mail) this.mails.push(mail)
    }
  }

  add(raw: Buffer, about: Omit<StoredMail, 'number' | 'sha256'>): StoredMail {
    const mail = {
      number: (this.mails.at(-1)?.number ?? 0) + 1,
      ...about,
      sha256: createHash('sha256').update(raw).digest('hex'),
    }
    writeFileSync(this.path(mail), raw)
    appendFileSync(join(this.folder, 'index.jsonl'), `${JSON.stringify(mail)}\n`)
    this.mails.push(mail)
    return mail
  }

  /** Newest first; with `to` only those that this address got. */
  list(to?: string): readonly StoredMail[] {
    const wanted = to?.trim().toLowerCase()
    return this.mails.filter((mail) => !wanted || mail.to.includes(wanted)).reverse()
  }

  find(number: number): StoredMail | undefined {
    return this.mails.find((mail) => mail.number === number)
  }

  raw(mail: StoredMail): Buffer {
    return readFileSync(this.path(mail))
  }

  private path(mail: StoredMail): string {
    return join(this.folder, `${String(mail.number).padStart(4, '0')}.eml`)
  }
}

function parseLine(line: string): StoredMail | undefined {
  try {
    return line === '' ? undefined : (JSON.parse(line) as StoredMail)
  } catch {
    return undefined
  }
}
