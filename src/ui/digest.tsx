import { CopyButton } from './copy-button.tsx'

/** A digest in groups of four digits. */
export function digestGroups(digest: string): readonly string[] {
  return digest.match(/.{1,4}/g) ?? []
}

/** Its first and last eight digits: enough to compare by eye, not to prove anything. */
export function shortDigest(digest: string): string {
  if (digest.length <= 24) return digest
  return `${digest.slice(0, 4)} ${digest.slice(4, 8)} … ${digest.slice(-8, -4)} ${digest.slice(-4)}`
}

interface DigestProps {
  readonly value: string
  /** What it is the digest of, in the middle of a sentence: "the seal". */
  readonly what: string
  /** Words before it, on the same line. */
  readonly label?: string
}

/** A digest, short; whole on request, without JavaScript too. */
export function Digest({ value, what, label }: DigestProps) {
  return (
    <div className="digest-line">
      {label ? `${label} ` : null}
      <code className="digest">{shortDigest(value)}</code>
      <CopyButton value={value} what={what} />
      <details className="whole">
        <summary>
          Whole<span className="vh">: {what}</span>
        </summary>
        <p className="hex fine">{digestGroups(value).join(' ')}</p>
      </details>
    </div>
  )
}
