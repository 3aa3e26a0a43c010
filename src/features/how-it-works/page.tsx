import type { LoaderFunctionArgs } from 'react-router'
import { ChanceProduct } from '#src/features/ladder/chance.tsx'
import { Ladder, Winner } from '#src/features/ladder/ladder.tsx'
import { ReadingKey } from '#src/features/ladder/reading-key.tsx'
import { Head } from '#src/lib/head.tsx'
import { DataTable } from '#src/ui/data-table.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { ENTRANTS, everyWay, exampleWalk } from '#src/features/ladder/example.ts'
import { load } from '#src/lib/loading.ts'
import { siteKeysQuery } from './api/get-site-keys.ts'
import { statisticsQuery } from './api/get-statistics.ts'
import { KeysPart } from './keys-part.tsx'
import { OrderPart } from './order-part.tsx'

const LEAD =
  'First the list is sealed, then a random number comes into the world, then coins decide. The order is the point: nobody who could change the list could know the number, and nobody who knew the number could change the list.'

/** The page stands without its keys and figures. */
export async function loader(args: LoaderFunctionArgs) {
  await load(args, statisticsQuery).catch(() => null)
  await load(args, siteKeysQuery).catch(() => null)
  return null
}

export function Component() {
  return (
    <>
      <Head title="How it works" description={LEAD} path="/how-it-works" />
      <Title title="How it works" lead={LEAD} />
      <Steps />
      <OneCoin />
      <OneWalk />
      <TossedByHand />
      <Odds />
      <OrderPart />
      <WhatIsShown />
      <KeysPart />
      <Cautions />
    </>
  )
}

function Steps() {
  return (
    <Part title="Four steps">
      <ol className="figures">
        <li>
          <span className="figure">1</span>
          <div>
            <p>
              <b>The list closes.</b> Every entrant is one line with their number of tickets. A ticket that was paid for
              and a ticket that came free weigh the same.
            </p>
          </div>
        </li>
        <li>
          <span className="figure">2</span>
          <div>
            <p>
              <b>The list is sealed.</b> A fingerprint of the whole list, the prizes in their order, the rule and the
              hour of the draw are signed and published. Change one ticket and the fingerprint is another. The seal also
              names where the chance will come from: a round of a public beacon that does not exist yet, and a secret
              that the site has locked in.
            </p>
          </div>
        </li>
        <li>
          <span className="figure">3</span>
          <div>
            <p>
              <b>The random number appears.</b> The beacon is run by many organisations together; none of them can
              choose or hold back its number alone. Mixed with the site’s secret, which is opened at the same time, it
              gives a long row of fair flips. The beacon cannot steer the draw without the secret, and the site cannot
              without the beacon.
            </p>
          </div>
        </li>
        <li>
          <span className="figure">4</span>
          <div>
            <p>
              <b>Coins find each winner.</b> The list is split in two, a coin weighted by the tickets on both sides
              chooses a side, that side is split again, until one entrant is left. Everything is published: the list
              without names, every flip, every coin. The winners are named in the words that they agreed to.
            </p>
          </div>
        </li>
      </ol>
    </Part>
  )
}

function OneCoin() {
  const ways = everyWay(3, 8, 3)
  const heads = ways.filter((way) => way.heads).length
  return (
    <Part title="One weighted coin">
      <div className="measure">
        <p>
          Three tickets stand on the left, five on the right. The coin has to fall left exactly three times out of
          eight, but a flip is fair: it knows only one time out of two.
        </p>
        <p>
          So the chance is written in binary: 3/8 is 0.011. Flip after flip is held against digit after digit, and the
          first that differs decides: lower is heads, so left; higher is tails, so right. If the digits run out, it is
          tails. All eight ways that three flips can fall:
        </p>
      </div>
      <div className="mt-unit-2">
        <DataTable
          rows={ways}
          rowKey={(way) => way.flips}
          columns={[
            {
              key: 'flips',
              head: 'Three flips',
              rowHead: true,
              cell: (way) => <span className="mono">{way.flips}</span>,
            },
            { key: 'digits', head: 'against', cell: () => <span className="mono">011</span> },
            { key: 'used', head: 'Flips used', numeric: true, cell: (way) => way.used.length },
            {
              key: 'side',
              head: 'The coin',
              cell: (way) => (
                <span className="nb">
                  <i className={way.heads ? 'disc' : 'ring'} /> {way.heads ? 'heads, left' : 'tails, right'}
                </span>
              ),
            },
          ]}
        />
      </div>
      <p className="measure mt-unit">
        {heads} of the {ways.length} are heads: exactly {heads}/{ways.length}, with nothing rounded. Any other chance
        works the same way, with two flips on average at most, however many tickets there are.
      </p>
    </Part>
  )
}

function OneWalk() {
  const walk = exampleWalk()
  const winner = ENTRANTS[walk.leaf] ?? ENTRANTS[0]
  return (
    <>
      <Part title="One small draw" note={<p>Invented, and tossed on this page by the code that settles draws.</p>}>
        <p className="measure">
          {ENTRANTS.map((entrant) => `${entrant.name} holds ${countOf(entrant.tickets, 'ticket')}`).join(', ')}. That is{' '}
          {countOf(walk.remaining, 'ticket')}. Each bar below is all the tickets still in; the side that its coin chose
          opens out to the full width.
        </p>
        <ReadingKey />
      </Part>
      <section className="ladder-part" aria-label="A small walk, coin by coin">
        <Ladder
          coins={walk.coins}
          endNote={countOf(winner.tickets, 'ticket')}
          end={
            <Winner name={winner.name}>
              <p>
                {winner.tickets} of the {walk.remaining} tickets won.
              </p>
            </Winner>
          }
        />
      </section>
      <Part title="The chance, multiplied out">
        <p className="measure">
          Whoever holds the tickets, the coins on the way to them always multiply to the tickets they hold over all the
          tickets in. The split does not matter, nor the order of the list.
        </p>
        <ChanceProduct coins={walk.coins} ticketsIn={winner.tickets} remaining={walk.remaining} />
      </Part>
    </>
  )
}

function TossedByHand() {
  return (
    <Part title="Coins tossed by hand">
      <div className="measure">
        <p>
          A draw can also name real tosses in front of a witness as its source. A real coin may lean to one side. John
          von Neumann’s method of 1951 takes the lean out: toss twice, drop equal pairs, and let the first toss of an
          unequal pair count, because heads then tails is exactly as likely as tails then heads.
        </p>
        <p>
          Yuval Peres showed in 1992 how to get nearly all the fairness that the dropped pairs still hold, by doing the
          same again with what the first pass leaves over. The tosses come in rounds of a length fixed in the seal, so
          that nobody can stop at a moment that suits them.
        </p>
      </div>
    </Part>
  )
}

function Odds() {
  return (
    <Part title="How the odds are worked out" id="odds">
      <div className="measure">
        <p>
          The chance of the first prize is the tickets held over all the tickets in: 9 of 142 tickets have a chance of
          9/142, about 1 in 16. Over several prizes it is more than that, and not simply as many times more, because
          each prize changes what is left.
        </p>
        <p>
          Where every ticket counts for itself, a ticket that has won leaves the list. The chance that none of yours is
          among those drawn is a plain quotient of two numbers of ways, the hypergeometric distribution.
        </p>
        <p>
          Where an entrant wins one prize at most, all the tickets of a winner leave. Statisticians call it successive
          sampling. Give every ticket a clock that rings at a moment of its own, and the first rings of the entrants
          come in the order of the draw; you win when one of yours rings before the last of the prizes has gone to
          others. That chance is an integral, worked out to nine digits. For small draws it is compared with going
          through everything that can happen, which gives a fraction; the site’s tests also compare it with another
          statistics program and with a million draws.
        </p>
      </div>
    </Part>
  )
}

function WhatIsShown() {
  return (
    <Part title="What a check shows">
      <ul className="dashes measure">
        <li>The list that was drawn from is the list that was sealed.</li>
        <li>
          The random number is the one that the seal named beforehand, and the opened secret is the one locked in.
        </li>
        <li>Every coin follows from the flips, and every winner from the coins.</li>
      </ul>
      <div className="mt-unit-2">
        <Notice title="What no check can show">
          <p>
            That every ticket sold was entered, or that the people in the list exist. That is why every entrant has a
            receipt that proves their own tickets are in the sealed list, and why a witness looks at stubs and list
            before the seal. Nor can arithmetic show when the seal was made: somebody other than this site must have
            seen it before the draw.
          </p>
        </Notice>
      </div>
      <p className="measure mt-unit-2">
        <Link to="/developers">The public files, and how to check them by one command</Link>
      </p>
    </Part>
  )
}

function Cautions() {
  return (
    <Part title="Cautions">
      <ul className="dashes measure">
        <li>
          A draw with paid tickets is a lottery in many places: it may need a licence or registration, and may be
          limited in prices, prizes and who may enter. Evenpenny never says that a draw is lawful. Ask the local
          authority or take licensed advice.
        </li>
        <li>Nobody will ask a winner for a fee. If someone does, tell the promoter.</li>
      </ul>
    </Part>
  )
}
