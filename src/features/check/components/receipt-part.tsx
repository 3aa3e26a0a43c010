import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import type { ReceiptView } from '../check-state.ts'
import { printable } from '../words.ts'

/** Receipts and short proofs that were given, each with what it shows. */
export function ReceiptPart({ receipts }: { readonly receipts: readonly ReceiptView[] }) {
  if (receipts.length === 0) return null
  return (
    <Part title="Receipts" note={<p>Held against the seal in this archive, on this device</p>}>
      <ul className="check-receipts" aria-live="polite">
        {receipts.map((receipt) => (
          <li key={receipt.id}>
            <Finding receipt={receipt} />
          </li>
        ))}
      </ul>
    </Part>
  )
}

function Finding({ receipt: { name, finding } }: { readonly receipt: ReceiptView }) {
  const file = <code>{printable(name)}</code>
  if (finding === null) return <p>{file} waits for an archive that holds.</p>
  if (finding === 'unexamined') return <p>{file} was not examined: no archive has held.</p>
  if (finding.ok) return <p>{printable(finding.found)}</p>
  return (
    <Notice fault title={`${printable(name)} does not hold`}>
      <p>{printable(finding.message)}</p>
      <p className="note">
        Where: <code>{printable(finding.at)}</code>
        <br />
        Code: <code>{finding.code}</code>
      </p>
    </Notice>
  )
}
