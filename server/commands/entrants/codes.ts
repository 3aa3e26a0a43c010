import { referenceFromEntropy } from '#shared/protocol/commitments.ts'
import type { Entropy } from '#server/adapters/entropy/entropy.ts'

/** An entrant's stable code, for letters and help: 10 characters, 50 bits. Never the reference of a seal. */
export const newEntrantCode = (entropy: Entropy): string => referenceFromEntropy(entropy.bytes(10))
