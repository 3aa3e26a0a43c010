import { readFileSync } from 'node:fs'
import { join } from 'node:path'

/** Where `npm start` keeps the keys that it makes, below the data folder. */
export const keyFile = (data: string, name: 'session-secret' | 'encryption-keys' | 'signing-key.pem') =>
  join(data, 'keys', name)

export interface EncryptionKeySetting {
  readonly id: string
  /** 32 bytes. */
  readonly key: Uint8Array
}

/** `id:base64,id:base64`, 32 bytes each, the first encrypts. @returns a sentence if something is wrong. */
export function parseEncryptionKeys(text: string): readonly EncryptionKeySetting[] | string {
  const keys: EncryptionKeySetting[] = []
  for (const entry of text.split(',').map((part) => part.trim())) {
    const [, id, base64] = /^([a-z0-9-]{1,32}):([A-Za-z0-9+/]{43}=)$/.exec(entry) ?? []
    if (id === undefined || base64 === undefined)
      return 'must be a list like k2:<base64>,k1:<base64>: each key an id of a-z, 0-9 and "-", a colon, and 32 bytes in base64 (openssl rand -base64 32). The first one encrypts.'
    if (keys.some((key) => key.id === id)) return `holds two keys with the id "${id}". Give each its own.`
    keys.push({ id, key: new Uint8Array(Buffer.from(base64, 'base64')) })
  }
  return keys
}

const pemBlock = /-----BEGIN [A-Z ]+-----[\s\S]*?-----END [A-Z ]+-----/g

/**
 * Keys given as PEM, one behind the other (line feeds may be written as \n), or as paths with commas between them.
 * @returns a sentence if a file cannot be read or holds no key.
 */
export function parsePemKeys(text: string): readonly string[] | string {
  if (text.includes('-----BEGIN')) return text.replaceAll('\\n', '\n').match(pemBlock) ?? 'holds no whole PEM block.'
  const keys: string[] = []
  // The value is not repeated: it may be a key whose first line was lost.
  for (const [index, path] of text.split(',').entries()) {
    const which = index === 0 ? 'a file' : `a file (number ${index + 1} of the list)`
    const content = readText(path.trim())
    if (content === undefined) return `names ${which} that cannot be read. Give its right path, or the PEM text itself.`
    const [block, ...more] = content.match(pemBlock) ?? []
    if (block === undefined || more.length > 0) return `names ${which} that does not hold one PEM block.`
    keys.push(block)
  }
  return keys
}

/** Text given as PEM (line feeds may be written as \n), or that of the files named, with commas between them; null if one cannot be read. */
export function parsePemTexts(text: string): string | null {
  if (text.includes('-----BEGIN')) return text.replaceAll('\\n', '\n')
  const texts = text.split(',').map((path) => readText(path.trim()))
  return texts.includes(undefined) ? null : texts.join('\n')
}

export function readText(path: string): string | undefined {
  try {
    return readFileSync(path, 'utf8').trim()
  } catch {
    return undefined
  }
}
