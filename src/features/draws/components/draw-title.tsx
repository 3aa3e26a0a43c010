import type { DrawPage } from '#shared/schemas/api/public.ts'
import { formatMoney } from '#src/ui/format-number.ts'
import { formatClock, formatDate, wallClock } from '#src/ui/format-time.ts'
import { shortDigest } from '#src/ui/digest.tsx'
import { Link } from '#src/ui/link.tsx'
import { Facts, Title } from '#src/ui/page.tsx'
import { SealEdge } from '#src/ui/seal-edge.tsx'
import { StateTicket } from '#src/ui/state-ticket.tsx'
import { drawLead } from '../words.ts'

/** The head of a draw's page, whatever its state. */
export function DrawTitle({ draw }: { readonly draw: DrawPage }) {
  return (
    <Title
      broad
      title={draw.title}
      above={<Link to={`/organisations/${draw.organisation.slug}`}>{draw.organisation.name}</Link>}
      lead={drawLead(draw)}
      stubClass="with-seal"
      stub={<TitleStub draw={draw} />}
    >
      <Facts
        items={[
          ['In aid of', draw.goodCause],
          ['Promoter', `${draw.promoter.name}, ${draw.promoter.address}`],
          draw.witnesses.length > 0
            ? [
                draw.witnesses.length === 1 ? 'Witness' : 'Witnesses',
                draw.witnesses.map((witness) => (
                  <span className="block" key={witness.name}>
                    {witness.name}, {witness.role}. Connection with the organisation: {witness.connection}
                  </span>
                )),
              ]
            : null,
          draw.licence ? ['Registered', `${draw.licence}, as the promoter states`] : null,
          ['A ticket', draw.ticketPrice ? `${formatMoney(draw.ticketPrice)} each` : 'Free'],
        ]}
      />
    </Title>
  )
}

function TitleStub({ draw }: { readonly draw: DrawPage }) {
  const at = stubMoment(draw)
  const parts = shortDigest(draw.seal?.digest ?? '').split(' … ')
  return (
    <>
      {draw.seal && draw.state !== 'cancelled' ? (
        <SealEdge digest={draw.seal.digest} lines={[parts[0] ?? '', parts[1] ?? '']} />
      ) : null}
      <div>
        <StateTicket state={draw.state} />
        {at ? (
          <p className="stub-facts">
            {at.verb ? (
              <>
                {at.verb}
                <br />
              </>
            ) : null}
            <time dateTime={at.instant}>
              {wallClock(at.instant, draw.timeZone).weekday}
              <br />
              {formatDate(at.instant, draw.timeZone)}
              <br />
              at {formatClock(at.instant, draw.timeZone)}
            </time>
          </p>
        ) : null}
      </div>
    </>
  )
}

function stubMoment(draw: DrawPage): { readonly instant: string; readonly verb?: string } | null {
  const when = (event: string) => draw.history.filter((line) => line.event === event).at(-1)?.at
  switch (draw.state) {
    case 'draft':
      return null
    case 'open':
      return { instant: draw.closesAt, verb: 'Closes on' }
    case 'closed':
      return { instant: draw.closedAt ?? draw.closesAt }
    case 'sealed':
      return draw.seal ? { instant: draw.seal.sealedAt } : null
    case 'drawn':
    case 'concluded':
      return draw.result ? { instant: draw.result.drawnAt } : null
    case 'cancelled': {
      const at = when('cancelled')
      return at ? { instant: at } : null
    }
    case 'failed': {
      const at = when('failed')
      return at ? { instant: at } : null
    }
  }
}
