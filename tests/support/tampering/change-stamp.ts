import { der, TAG } from '#shared/timestamp/der.ts'
import { refuseTimestamp } from '#shared/timestamp/development-authority.ts'
import { parseTimestampResponse } from '#shared/timestamp/token.ts'
import type { Mutation } from '#tests/support/tampering/mutation.ts'
import { makeOpensslAuthority } from '#tests/support/timestamp/openssl-authority.ts'

type StampChange = NonNullable<Mutation['change']['stamp']>

/** Changes the bytes of a timestamp. */
export function changeStamp({ flip, bytes }: StampChange, response: Uint8Array): Uint8Array {
  if (flip !== undefined) return flipped(response, flip)
  switch (bytes) {
    case undefined:
      return response
    case 'refused':
      return refuseTimestamp('Closed today.')
    case 'empty':
      return new Uint8Array(0)
    case 'cut':
      return response.slice(0, -20)
    case 'longer':
      return Uint8Array.of(...response, 0)
    case 'indefinite':
      return Uint8Array.of(0x30, 0x80, ...response.subarray(4), 0, 0)
    case 'nested': {
      let nested: Uint8Array = new Uint8Array(0)
      for (let depth = 0; depth < 300; depth += 1) nested = der(TAG.sequence, nested)
      return nested
    }
    case 'large':
      return der(TAG.sequence, new Uint8Array(65_530))
    case 'unnamed':
    case 'by-a-stranger': {
      // With the key of a certificate that is for something else besides timestamps; or for them, but not named.
      const named = bytes === 'by-a-stranger'
      const authority = makeOpensslAuthority('p256', { extensions: named ? 'two-purposes' : 'signer' })
      try {
        return authority.signAnyway(granted(response).content, { named })
      } finally {
        authority.close()
      }
    }
  }
}

function granted(response: Uint8Array) {
  const answer = parseTimestampResponse(response)
  if (answer.kind !== 'granted') throw new Error('not granted')
  return answer.token
}

/** Changes the last bit of a part; of a certificate that of its signature. */
function flipped(response: Uint8Array, part: NonNullable<StampChange['flip']>): Uint8Array {
  const { content, signer, certificates } = granted(response)
  const parts = {
    signature: signer.signature,
    // Deep in the certificate's key, before its signature.
    certificate: certificates[0]?.subarray(0, 200) ?? new Uint8Array(0),
    content,
    attributes: signer.messageDigest ?? new Uint8Array(0),
    status: response.subarray(0, 9),
  }
  const chosen = parts[part]
  const changed = response.slice()
  const at = Buffer.from(response).indexOf(Buffer.from(chosen)) + chosen.length - 1
  changed[at] = (changed[at] ?? 0) ^ (part === 'status' ? 2 : 1)
  return changed
}
