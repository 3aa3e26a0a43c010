import { useQuery } from '@tanstack/react-query'
import type { LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { sessionQuery } from '#src/lib/session.ts'
import { Button } from '#src/ui/button.tsx'
import { digestGroups } from '#src/ui/digest.tsx'
import { formatMoney } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Part } from '#src/ui/page.tsx'
import { useDraw } from '../draw/use-draw.ts'
import { typedAddress } from './slip.tsx'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, sessionQuery)
  return null
}

/** A sheet for the wall: what is drawn, when, by whom, and where anybody can follow and check it. */
export function Component() {
  const { api, origin } = useApp()
  const draw = useDraw()
  const { data: session } = useQuery(sessionQuery(api))
  const fingerprint = session?.site.keyFingerprint ?? ''
  if (draw.state === 'draft') {
    return (
      <Part title="Poster">
        <p className="waits measure mt-0">The poster can be printed once the draw is open and has its address.</p>
      </Part>
    )
  }
  const address = `/draws/${draw.slug}`
  return (
    <>
      <Head title={`Poster: ${draw.title}`} description="A sheet for the wall." />
      <Part title="Poster" className="not-printed" note="One sheet of A4">
        <p className="measure">
          {draw.sealDigest
            ? 'The list is sealed, so the poster shows the whole digest of the seal: whoever photographs it can compare it later.'
            : 'Print it again once the list is sealed: it then shows the digest of the seal, which whoever photographs it can compare later.'}
        </p>
        <p className="buttons mt-unit">
          <Button onClick={() => window.print()}>Print it</Button>
        </p>
      </Part>
      <article className="poster" aria-label="Poster">
        <p className="poster-by">{draw.organisation.name}</p>
        <h2>{draw.title}</h2>
        <p className="poster-lead">In aid of: {draw.goodCause}</p>
        <ol className="poster-prizes">
          {draw.prizes.slice(0, 8).map((prize) => (
            <li key={prize.id}>
              {prize.quantity > 1 ? `${prize.quantity} × ` : ''}
              {prize.name}
            </li>
          ))}
        </ol>
        <p>
          {draw.ticketPrice ? `A ticket costs ${formatMoney(draw.ticketPrice)}. ` : 'Entry is free. '}
          {draw.state === 'open' ? `Entries until ${formatMoment(draw.closesAt, draw.timeZone)}. ` : ''}
          Draw on {formatMoment(draw.drawAt, draw.timeZone)}.
          {draw.minimumAge === null ? '' : ` For people of ${draw.minimumAge} and older.`}
        </p>
        <div className="poster-way">
          <img className="qr" src={`${address}/qr.svg`} alt={`QR code to ${typedAddress(origin, address)}`} />
          <div>
            <p>The terms, the winners, and every coin that decides, for anybody to check:</p>
            <p className="poster-address">{typedAddress(origin, address)}</p>
          </div>
        </div>
        {draw.sealDigest ? (
          <p className="poster-digest">
            The seal of the list, all 64 digits: <span>{digestGroups(draw.sealDigest).join(' ')}</span>
          </p>
        ) : null}
        <p className="poster-digest">
          The site’s key, by which its seals are known: <span>{digestGroups(fingerprint).join(' ')}</span>
        </p>
        <p className="poster-small">
          Promoter: {draw.promoterName}, {draw.promoterAddress}.
          {draw.licence ? ` ${draw.licence}, as the promoter states.` : ''}
        </p>
      </article>
    </>
  )
}
