import { formatSlipCode } from '#shared/entrants/slip-code.ts'
import type { SlipView } from '#shared/schemas/api/entry.ts'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { digestGroups } from '#src/ui/digest.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'

interface SlipProps {
  readonly slip: SlipView
  readonly draw: OfficeDraw
  /** Scheme, host and port of the site. */
  readonly origin: string
  /** Of the site's key. */
  readonly fingerprint: string
}

/** An address as it is typed: without its scheme. */
export const typedAddress = (origin: string, path: string): string => origin.replace(/^https?:\/\//, '') + path

/** One slip: whose it is, the QR code, and what to type where. */
export function Slip({ slip, draw, origin, fingerprint }: SlipProps) {
  return (
    <article className="slip">
      <svg
        className="qr"
        viewBox={`0 0 ${slip.qr.side} ${slip.qr.side}`}
        role="img"
        aria-label={`QR code to the entry of ${slip.name}`}
        shapeRendering="crispEdges"
      >
        <path fill="#fff" d={`M0 0h${slip.qr.side}v${slip.qr.side}H0z`} />
        <path fill="#000" d={slip.qr.path} />
      </svg>
      <div>
        <h3>{draw.title}</h3>
        <p>
          {slip.name}: {countOf(slip.tickets, 'ticket')}
          {slip.numbers === null ? '' : `, ${slip.numbers}`}. Draw on {formatMoment(draw.drawAt, draw.timeZone)}.
        </p>
        <p>
          Your entry, your receipt and, after the draw, every coin of it: scan the square, or open{' '}
          <b>{typedAddress(origin, '/entry')}</b> and type
        </p>
        <p className="slip-code">{formatSlipCode(slip.code)}</p>
        <p className="slip-key">
          {draw.organisation.name}. Keep this slip to yourself. The site’s key: {digestGroups(fingerprint).join(' ')}
        </p>
      </div>
    </article>
  )
}
