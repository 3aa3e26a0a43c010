import type { Sha256 } from '#shared/bytes/hashing.ts'
import { type NoteKey, parseVkey } from '#shared/log/signed-note.ts'
import type { CheckOptions } from '#shared/protocol/check/state.ts'
import { type Certificate, certificatesOfPem } from '#shared/timestamp/certificate.ts'
import type { StartOptions } from '../messages.ts'

/** What the reader trusts cannot be read; the message is a whole sentence. */
export class TrustError extends Error {}

/** The reader's choices as the shared check takes them. Throws TrustError. */
export function checkOptions(sha256: Sha256, options: StartOptions): CheckOptions {
  const { allowDevelopment, authorities, expectedKey, witnesses } = options
  return {
    allowDevelopmentChain: allowDevelopment,
    allowDevelopmentAuthority: allowDevelopment,
    trustedAuthorities: authorities.flatMap(readAuthority),
    witnesses: witnesses.map((text) => readWitness(sha256, text)),
    ...(expectedKey === null ? {} : { expectedKey }),
  }
}

function readAuthority({ name, pem }: StartOptions['authorities'][number]): readonly Certificate[] {
  let found: readonly Certificate[]
  try {
    found = certificatesOfPem(pem)
  } catch {
    throw new TrustError(`A certificate in ${name} cannot be read. Take the file out, or choose another.`)
  }
  if (found.length === 0) throw new TrustError(`${name} holds no certificate in PEM. Take it out, or choose another.`)
  return found
}

function readWitness(sha256: Sha256, text: string): NoteKey {
  const key = parseVkey(sha256, text)
  if (!key.ok) throw new TrustError(`The witness’s key ${text} cannot be read. ${key.error.message}`)
  if (key.value.type !== 4) {
    throw new TrustError(`The key ${text} is of another type: only one of type 4 cosigns checkpoints.`)
  }
  return key.value
}
