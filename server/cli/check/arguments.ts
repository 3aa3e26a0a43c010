import { parseArgs } from 'node:util'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { type NoteKey, parseVkey } from '#shared/log/signed-note.ts'

export const CHECK_USAGE = `Usage: npm run check -- [options] proof.zip [receipt.json …]
       npm run check -- [options] --url DRAW_PAGE [receipt.json …]

  proof.zip           a proof archive, or a folder into which one was unpacked
  receipt.json …      receipts or short proofs to check against it
  --url DRAW_PAGE     fetches the archive of a draw's page first, as in https://site.example/draws/spring-fair
  --key FINGERPRINT   all 64 hexadecimal digits of the site's key, from its pages, posters or tickets
  --tsa FILE.pem      the certificate of a timestamp authority that you trust, from a place other than the site; may be repeated
  --witness KEY       the key (NAME+ID+KEY) of an outside witness of the site's log that you trust; may be repeated
  --remember FILE     keeps the last checkpoint of the site's log in a file; with --url, proves that the log only grew
  --test-beacon       lets the development chain pass, for tests and rehearsals
  --test-timestamps   lets the development authority vouch for a timestamp, for tests and rehearsals`

/** The command was used in a way that it does not understand; the message is a whole sentence. */
export class UsageError extends Error {}

export interface CheckArguments {
  readonly archive: { readonly kind: 'path'; readonly path: string } | { readonly kind: 'url'; readonly url: URL }
  readonly receipts: readonly string[]
  readonly expectedKey: string | undefined
  readonly testBeacon: boolean
  /** Where the last checkpoint of the log is kept. */
  readonly remember: string | undefined
  readonly testTimestamps: boolean
  /** Files with certificates in PEM. */
  readonly authorities: readonly string[]
  readonly witnesses: readonly NoteKey[]
}

/** Reads the command line of `npm run check`. Throws UsageError. */
export function readCheckArguments(args: readonly string[]): CheckArguments {
  const { values, positionals } = parse(args)
  const receipts = [...positionals]
  const common = {
    expectedKey: readFingerprint(values.key),
    testBeacon: values['test-beacon'] === true,
    remember: values.remember,
    testTimestamps: values['test-timestamps'] === true,
    authorities: values.tsa ?? [],
    witnesses: (values.witness ?? []).map(readWitness),
  }
  if (values.url !== undefined) return { archive: { kind: 'url', url: proofAddress(values.url) }, receipts, ...common }
  const path = receipts.shift()
  if (path === undefined) throw new UsageError('Say which proof archive to check, or give a draw page with --url.')
  return { archive: { kind: 'path', path }, receipts, ...common }
}

function parse(args: readonly string[]) {
  try {
    return parseArgs({
      args: [...args],
      allowPositionals: true,
      options: {
        'test-beacon': { type: 'boolean' },
        'test-timestamps': { type: 'boolean' },
        key: { type: 'string' },
        remember: { type: 'string' },
        tsa: { type: 'string', multiple: true },
        url: { type: 'string' },
        witness: { type: 'string', multiple: true },
      },
    })
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error))
  }
}

/** A fingerprint as people copy it: in capitals, in groups. */
function readFingerprint(text: string | undefined): string | undefined {
  if (text === undefined) return undefined
  const digits = text.replace(/[\s:-]/g, '').toLowerCase()
  if (!/^[0-9a-f]{64}$/.test(digits)) {
    throw new UsageError('--key wants all 64 hexadecimal digits of the fingerprint; shortened ones prove nothing.')
  }
  return digits
}

function readWitness(text: string): NoteKey {
  const key = parseVkey(sha256, text)
  if (!key.ok) throw new UsageError(`--witness ${text}: ${key.error.message}`)
  if (key.value.type !== 4)
    throw new UsageError('--witness wants a key of type 4: only such a key cosigns checkpoints.')
  return key.value
}

/** Where a draw page keeps its archive; the archive's own address passes too. */
function proofAddress(text: string): URL {
  if (!URL.canParse(text)) throw new UsageError(`--url wants the whole address of a draw's page; ${text} is none.`)
  const url = new URL(text)
  if (url.protocol !== 'http:' && url.protocol !== 'https:') {
    throw new UsageError('--url wants an address that begins with https:// or http://.')
  }
  url.hash = ''
  url.search = ''
  const path = url.pathname.replace(/\/+$/, '')
  url.pathname = path.endsWith('/proof.zip') ? path : `${path}/proof.zip`
  return url
}
