import { readFileSync } from 'node:fs'
import { parseArgs } from 'node:util'
import { readSigningKey, type SigningKey } from '#server/adapters/signing/signing-keys.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { type NoteKey, noteKey, parseVkey } from '#shared/log/signed-note.ts'

export const WITNESS_USAGE = `Usage: npm run witness -- --key FILE --name NAME --log VKEY … [--state FILE] [--listen PORT] [--host ADDRESS]

  --key FILE        the witness's own Ed25519 key in PEM; make one with: openssl genpkey -algorithm ed25519 -out FILE
  --name NAME       the name under which it cosigns: an address of yours without https://, like witness.example/draws
  --log VKEY        the key (NAME+ID+KEY) of a log to follow, from the site's /site-keys.json; may be repeated
  --state FILE      where it remembers what it cosigned (witness-state.json); a witness that forgets is none: keep a copy
  --listen PORT     the port to listen on (4790)
  --host ADDRESS    the address to listen on (127.0.0.1); put a web server with HTTPS in front for others

It prints its own key, which people give to a check with --witness, and sites take as a witness. Logs send it their
checkpoints (POST /add-checkpoint, C2SP tlog-witness), and it cosigns those that hold all that it cosigned before.`

/** The command was used in a way that it does not understand; the message is a whole sentence. */
export class UsageError extends Error {}

export interface WitnessArguments {
  readonly signing: SigningKey
  readonly key: NoteKey
  readonly logs: readonly NoteKey[]
  readonly state: string
  readonly port: number
  readonly host: string
}

/** Reads the command line of `npm run witness`. Throws UsageError. */
export function readWitnessArguments(args: readonly string[]): WitnessArguments {
  const values = parse(args)
  if (values.key === undefined || values.name === undefined) throw new UsageError('Give --key and --name.')
  if (!values.log || values.log.length === 0) throw new UsageError('Say with --log which log to follow.')
  const signing = readKey(values.key)
  const port = Number(values.listen ?? '4790')
  if (!Number.isInteger(port) || port < 0 || port > 65535) throw new UsageError('--listen wants a port.')
  return {
    signing,
    key: ownKey(values.name, signing),
    logs: values.log.map(readLogKey),
    state: values.state ?? 'witness-state.json',
    port,
    host: values.host ?? '127.0.0.1',
  }
}

function parse(args: readonly string[]) {
  try {
    const options = {
      key: { type: 'string' },
      name: { type: 'string' },
      log: { type: 'string', multiple: true },
      state: { type: 'string' },
      listen: { type: 'string' },
      host: { type: 'string' },
    } as const
    return parseArgs({ args: [...args], options }).values
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error))
  }
}

function readKey(path: string): SigningKey {
  let pem: string
  try {
    pem = readFileSync(path, 'utf8')
  } catch {
    throw new UsageError(`There is no key ${path}. Make one with: openssl genpkey -algorithm ed25519 -out ${path}`)
  }
  try {
    return readSigningKey(pem)
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error))
  }
}

function ownKey(name: string, signing: SigningKey): NoteKey {
  try {
    return noteKey(sha256, name, 4, signing.publicKey)
  } catch {
    throw new UsageError('--name wants a name without spaces and plus signs, like witness.example/draws.')
  }
}

function readLogKey(text: string): NoteKey {
  const key = parseVkey(sha256, text)
  if (!key.ok) throw new UsageError(`--log ${text}: ${key.error.message}`)
  if (key.value.type !== 1) throw new UsageError('--log wants a key of type 1: the log signs with it.')
  return key.value
}
