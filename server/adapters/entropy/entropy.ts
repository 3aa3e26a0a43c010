import { randomBytes } from 'node:crypto'

/** Secret randomness, as an argument. */
export interface Entropy {
  /** So many fresh bytes that nobody can predict. */
  bytes(count: number): Uint8Array
}

/** The operating system's generator, through node:crypto. */
export const systemEntropy: Entropy = { bytes: (count) => new Uint8Array(randomBytes(count)) }
