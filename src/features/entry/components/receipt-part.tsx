import { useEffect, useState } from 'react'
import { noteReceiptOpened, type EntryView } from '#shared/schemas/api/entry.ts'
import { useApp } from '#src/lib/app-context.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { Digest } from '#src/ui/digest.tsx'
import { countOf, formatBytes, formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import { proveReceipt, type ReceiptProof } from '../receipt-proof.ts'
import { Sums } from './sums.tsx'

interface ReceiptPartProps {
  readonly entry: EntryView
  readonly token: string
}

/** The receipt: proven in this browser, to be kept, and the short proof that may be shown to others. */
export function ReceiptPart({ entry, token }: ReceiptPartProps) {
  const { sealed, draw } = entry
  if (!sealed) return null
  const tickets = countOf(entry.tickets, 'ticket')
  return (
    <Part
      title="Your proof"
      note={
        <p>
          Leaf {formatNumber(sealed.leaf)}, counted from 0, of {formatNumber(draw.entrants)}
        </p>
      }
    >
      {sealed.receipt === null ? (
        <p className="measure">
          The key that receipts of this draw are made with is destroyed, so this page can make none any more. One that
          you downloaded before still proves the same.
        </p>
      ) : (
        <>
          <p className="measure">
            {entry.tickets === 1 ? 'Your ticket is' : `Your ${tickets} are`} in the sealed list. Your receipt leads from
            there to the sealed total: add the number beside yours, step by step.
          </p>
          <Sums receipt={sealed.receipt} />
          <Proof key={sealed.digest} receipt={sealed.receipt} slug={draw.slug} token={token} />
          <p className="buttons mt-unit-2">
            <ButtonLink plain download to={`/entry/${token}/receipt.json`}>
              Download the receipt, {formatBytes(sealed.receipt.length)}
            </ButtonLink>
            <ButtonLink plain download quiet to={`/entry/${token}/short-proof.json`}>
              Download the short proof
            </ButtonLink>
          </p>
          <p className="note measure mt-unit">
            Keep the receipt private: it holds your name and how you can be reached. The short proof names nobody, so
            you may show it to anyone: it says that leaf {formatNumber(sealed.leaf)} holds {tickets}. Both can be
            checked on <Link to={`/draws/${draw.slug}/check`}>the draw’s check page</Link>.
          </p>
        </>
      )}
      <div className="note mt-unit">
        <Digest label="Seal" value={sealed.digest} what="the seal" />
        <Digest label="Signed with the site’s key" value={sealed.keyFingerprint} what="the key’s fingerprint" />
      </div>
      {sealed.replaced.map((old) => (
        <p className="note measure mt-unit" key={old.digest}>
          A receipt of the seal {old.digest.slice(0, 8)}…, made on {formatMoment(old.sealedAt, draw.timeZone)}, no
          longer counts: that seal was replaced{old.reason === null ? '.' : `. The reason given: “${old.reason}”`}
        </p>
      ))}
    </Part>
  )
}

interface ProofProps {
  readonly receipt: string
  readonly slug: string
  readonly token: string
}

function Proof({ receipt, slug, token }: ProofProps) {
  const { api } = useApp()
  const [proof, setProof] = useState<ReceiptProof | null>(null)
  useEffect(() => {
    let gone = false
    void proveReceipt(receipt, slug, fetch).then((found) => {
      if (gone) return
      setProof(found)
      // Only a number of openings is shown; a failure to count is nothing that the reader has to hear of.
      if (found.kind === 'proven') api.call(noteReceiptOpened, { params: { token }, body: {} }).catch(() => undefined)
    })
    return () => {
      gone = true
    }
  }, [api, receipt, slug, token])
  return (
    <div className="mt-unit-2" role="status">
      {proof === null ? <Unproven /> : <Outcome proof={proof} />}
    </div>
  )
}

/** Without JavaScript this stays. */
function Unproven() {
  return (
    <>
      <noscript>
        <p className="measure">
          With JavaScript this browser would prove the receipt here by itself. Without it, download the receipt and give
          it to the check that comes with the proof archive.
        </p>
      </noscript>
    </>
  )
}

function Outcome({ proof }: { readonly proof: ReceiptProof }) {
  switch (proof.kind) {
    case 'proven':
      return (
        <Notice title="Proven in this browser">
          <p>
            This browser fetched the public seal, added and hashed your receipt, and came to the sealed root and to all{' '}
            {countOf(proof.total, 'ticket')}.
          </p>
        </Notice>
      )
    case 'replaced':
      return (
        <Notice title="The seal was just replaced" fault>
          <p>The public seal is a newer one than your receipt’s. Load this page again for the new receipt.</p>
        </Notice>
      )
    case 'wrong':
      return (
        <Notice title="This receipt does not lead to the public seal" fault>
          <p>{proof.words} Keep this page and the receipt, and tell the witness or the promoter.</p>
        </Notice>
      )
    case 'unreachable':
      return (
        <Notice title="Not proven yet">
          <p>The public seal could not be fetched. Check the connection and load the page again.</p>
        </Notice>
      )
  }
}
