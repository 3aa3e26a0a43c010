import { MAX_RECEIPT } from '#shared/protocol/check/receipts-step.ts'
import { formatBytes } from '#src/ui/format-number.ts'
import { MAX_ARCHIVE_FILE } from './worker/fetch-archive.ts'

export interface RefusedFile {
  readonly name: string
  /** Why, in a whole sentence. */
  readonly why: string
}

export interface SortedFiles {
  /** The first proof archive among them. */
  readonly archive: File | null
  /** Receipts and short proofs. */
  readonly receipts: readonly File[]
  /** Certificates in PEM. */
  readonly certificates: readonly File[]
  readonly refused: readonly RefusedFile[]
}

const MOST_CERTIFICATE_BYTES = 2 ** 18
/** Receipts that are taken at once. */
const MOST_RECEIPTS = 200

/** Tells archives from receipts by how they begin, and refuses the rest by name. Reads a few bytes of each. */
export async function sortFiles(files: readonly File[]): Promise<SortedFiles> {
  let archive: File | null = null
  const receipts: File[] = []
  const certificates: File[] = []
  const refused: RefusedFile[] = []
  for (const file of files) {
    const kind = await kindOf(file)
    const refuse = (why: string) => refused.push({ name: file.name, why })
    if (kind === 'unreadable') refuse('It could not be read. A folder has to be packed again first.')
    else if (kind === 'empty') refuse('It is empty.')
    else if (kind === 'archive' && file.size > MAX_ARCHIVE_FILE) refuse('It is longer than any proof archive can be.')
    else if (kind === 'archive' && archive !== null)
      refuse(`One archive is checked at a time, and ${archive.name} is it.`)
    else if (kind === 'archive') archive = file
    else if (kind === 'certificate' && file.size <= MOST_CERTIFICATE_BYTES) certificates.push(file)
    else if (kind === 'certificate') refuse(`It is ${formatBytes(file.size)} long, and no certificate is so long.`)
    else if (kind === 'other') refuse('It is neither a proof archive (a zip) nor a receipt or short proof (JSON).')
    else if (file.size > MAX_RECEIPT)
      refuse(`It is ${formatBytes(file.size)} long, and no receipt is longer than 1 MB.`)
    else if (receipts.length >= MOST_RECEIPTS) refuse(`${MOST_RECEIPTS} receipts are taken at a time.`)
    else receipts.push(file)
  }
  return { archive, receipts, certificates, refused }
}

type Kind = 'archive' | 'receipt' | 'certificate' | 'other' | 'empty' | 'unreadable'

async function kindOf(file: File): Promise<Kind> {
  if (file.size === 0) return 'empty'
  const head = await file
    .slice(0, 4)
    .arrayBuffer()
    .then(
      (bytes) => new Uint8Array(bytes),
      () => null,
    )
  if (head === null) return 'unreadable'
  if (head[0] === 0x50 && head[1] === 0x4b) return 'archive'
  if (/\.zip$/i.test(file.name)) return 'archive'
  if (/\.(pem|crt|cer)$/i.test(file.name) || (head[0] === 0x2d && head[1] === 0x2d)) return 'certificate'
  // A receipt begins with a brace; one that is damaged is still to be refused as a receipt.
  return head[0] === 0x7b || /\.json$/i.test(file.name) ? 'receipt' : 'other'
}
