/** Limits of the record format (PROTOCOL "Limits"). A check stops at a limit and says so. */

export const FORMAT = 'evenpenny/1'
export const MAX_TICKETS_EACH = 2 ** 32 - 1
export const MAX_TICKETS = Number.MAX_SAFE_INTEGER
export const MAX_ENTRANTS = 2_000_000
export const MAX_PICKS = 100_000
/** An unpacked archive, in bytes. */
export const MAX_ARCHIVE_BYTES = 2 ** 30
/** Seconds between sealedAt and drawAt, at least (section 3). */
export const MIN_SEAL_LEAD = 120
/** Seconds between drawAt and revealBy, at most (section 3). */
export const MAX_REVEAL_DELAY = 86_400
export const MIN_ROUND_LENGTH = 8
export const MAX_ROUND_LENGTH = 256
/** Fair bits at least in a derived draw without a beacon (section 3). */
export const MIN_BITS_WITHOUT_BEACON = 64
/** Walks of the witness's sample (section 12). */
export const SAMPLE_WALKS = 59
