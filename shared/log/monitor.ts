import { equalBytes } from '#shared/bytes/bytes.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import type { Checkpoint } from '#shared/log/checkpoint.ts'
import { verifyLogConsistency } from '#shared/merkle/rfc9162.ts'

/**
 * What became of a log since a checkpoint that somebody remembers. `rewound` and `forked` are alarms: an honest log
 * does neither. Checkpoints must be verified before they are compared.
 */
export type LogChange =
  | { readonly kind: 'first'; readonly now: Checkpoint }
  | { readonly kind: 'same'; readonly now: Checkpoint }
  | { readonly kind: 'grown'; readonly before: Checkpoint; readonly now: Checkpoint }
  | { readonly kind: 'rewound'; readonly before: Checkpoint; readonly now: Checkpoint }
  | {
      readonly kind: 'forked'
      /** `root`: two roots for one size. `proof`: no proof leads from the older head to the newer one. */
      readonly why: 'root' | 'proof'
      readonly before: Checkpoint
      readonly now: Checkpoint
    }
  | { readonly kind: 'other-log'; readonly before: Checkpoint; readonly now: Checkpoint }

/** Whether a change is an alarm. */
export function isAlarm(change: LogChange): boolean {
  return change.kind === 'rewound' || change.kind === 'forked'
}

/**
 * Whether a consistency proof is needed to compare two heads; its sizes are theirs, in this order. A log that was empty
 * has nothing to prove.
 */
export function needsProof(before: Checkpoint | null, now: Checkpoint): boolean {
  return before !== null && before.origin === now.origin && before.size > 0 && before.size < now.size
}

/**
 * Compares the newest head of a log with the one remembered, null where there is none. `proof` is the consistency proof
 * between their sizes (RFC 9162 section 2.1.4), null where the site gave none. A newer head must be proven to hold all
 * of the older one; a smaller size is a log that was wound back, whatever else is said.
 */
export function compareHeads(
  sha256: Sha256,
  before: Checkpoint | null,
  now: Checkpoint,
  proof: readonly Uint8Array[] | null,
): LogChange {
  if (before === null) return { kind: 'first', now }
  if (before.origin !== now.origin) return { kind: 'other-log', before, now }
  if (now.size < before.size) return { kind: 'rewound', before, now }
  if (now.size === before.size) {
    return equalBytes(now.root, before.root) ? { kind: 'same', now } : { kind: 'forked', why: 'root', before, now }
  }
  const sizes = { first: before.size, second: now.size, firstRoot: before.root, secondRoot: now.root }
  if (needsProof(before, now) && (proof === null || !verifyLogConsistency(sha256, { ...sizes, proof }))) {
    return { kind: 'forked', why: 'proof', before, now }
  }
  return { kind: 'grown', before, now }
}

/** What a change means, in whole sentences. */
export function logChangeWords(change: LogChange): string {
  const { now } = change
  switch (change.kind) {
    case 'first':
      return `This is the first checkpoint of ${now.origin} seen here, with ${entries(now.size)}.`
    case 'same':
      return `The log ${now.origin} stands as it was seen before, with ${entries(now.size)}.`
    case 'grown':
      return `The log ${now.origin} only grew, from ${entries(change.before.size)} to ${now.size}: nothing seen before was changed or taken out.`
    case 'rewound':
      return `The log ${now.origin} was wound back: it showed ${entries(change.before.size)} before, and shows ${now.size} now. Keep both checkpoints: they are proof against the site.`
    case 'forked':
      return change.why === 'root'
        ? `The log ${now.origin} was forked: it shows another root for the same ${entries(now.size)}. Keep both checkpoints: they are proof against the site.`
        : `The log ${now.origin} was forked: nothing proves that its ${entries(now.size)} begin with the ${change.before.size} seen before. Keep both checkpoints: they are proof against the site.`
    case 'other-log':
      return `The checkpoint remembered is of ${change.before.origin}, and this one of ${now.origin}: two logs cannot be compared.`
  }
}

function entries(count: number): string {
  return count === 1 ? '1 entry' : `${count} entries`
}
