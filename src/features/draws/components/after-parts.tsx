import type { DrawPage } from '#shared/schemas/api/public.ts'
import { Digest } from '#src/ui/digest.tsx'
import { FlipsChart } from '#src/ui/flips-chart.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatBrief } from '#src/ui/format-time.ts'
import { Facts, Part } from '#src/ui/page.tsx'
import { CountChart, LeafChart } from '#src/ui/spread-chart.tsx'

export function SpreadPart({ draw }: { readonly draw: DrawPage }) {
  const { spread, seal } = draw
  if (!spread || !seal) return null
  const held =
    spread.kind === 'leaves'
      ? spread.tickets
      : spread.counts.flatMap((count) => (count.entrants > 0 ? [count.tickets] : []))
  const [low, high] = [Math.min(...held), Math.max(...held)]
  const range =
    low === high ? `${countOf(low, 'ticket')} each` : `from ${formatNumber(low)} to ${formatNumber(high)} each`
  return (
    <Part title="Tickets and entrants">
      <p className="measure">
        {countOf(seal.entrants, 'entrant')} held {countOf(seal.tickets, 'ticket')}, {range}.{' '}
        {spread.kind === 'counts'
          ? 'Each bar shows how many entrants held so many.'
          : spread.tickets.length <= 25 && high <= 24
            ? 'One stack is one entrant, one dot is one ticket. The filled stacks won a prize.'
            : 'One upright bar is one entrant, as high as their tickets. The filled ones won a prize.'}
      </p>
      <div className="chart">
        {spread.kind === 'leaves' ? (
          <LeafChart tickets={spread.tickets} winners={spread.winners} />
        ) : (
          <CountChart counts={spread.counts} />
        )}
      </div>
      <p className="note">
        {spread.kind === 'leaves'
          ? 'In the order of the sealed list, which is by a random code and gives no name away.'
          : 'Tickets held, and entrants who held them.'}
      </p>
    </Part>
  )
}

export function SettledPart({ draw }: { readonly draw: DrawPage }) {
  const { seal, result } = draw
  if (!seal || !result) return null
  const zone = draw.timeZone
  const awards = result.picks.length === result.pickCount ? result.picks : null
  const prizes = awards?.filter((pick) => pick.award.kind === 'prize').length
  const led = awards
    ? `led to ${countOf(prizes ?? 0, 'winner', 'winners', true)}${awards.length > (prizes ?? 0) ? ` and ${countOf(awards.length - (prizes ?? 0), 'reserve', 'reserves', true)}` : ''}`
    : `settled ${formatNumber(result.pickCount)} picks`
  const results = draw.witnesses.flatMap((witness) =>
    witness.statements.filter((statement) => statement.about === 'result').map((statement) => ({ witness, statement })),
  )
  return (
    <Part title="How it was settled" className="sheet">
      <ol className="account">
        {draw.closedAt ? (
          <Step at={draw.closedAt} zone={zone} title="Closed">
            The list was complete: {countOf(seal.entrants, 'entrant')}, {countOf(seal.tickets, 'ticket')}. Each ticket
            weighs the same, whether it was paid for or came free.
          </Step>
        ) : null}
        <Step
          at={seal.sealedAt}
          zone={zone}
          title="Sealed"
          exact={<Digest label="Seal" value={seal.digest} what="the seal" />}
        >
          The list, the prizes, their order and the rule were signed and published, before anyone could know the random
          number.
        </Step>
        {seal.beacon ? (
          <Step
            at={seal.beacon.at}
            zone={zone}
            title="Beacon round"
            exact={
              result.beacon ? (
                <Digest
                  label={`Round ${formatNumber(result.beacon.round)},`}
                  value={result.beacon.randomness}
                  what="the round’s random number"
                />
              ) : undefined
            }
          >
            {seal.beacon.network === 'quicknet'
              ? 'A public source of random numbers, run by many organisations together, published the round that the seal had named.'
              : 'The development chain published the round that the seal had named. Its secret is public: this shows the arithmetic, not chance.'}
          </Step>
        ) : null}
        <Step
          at={result.drawnAt}
          zone={zone}
          title="Drawn"
          exact={result.drawKey ? <Digest label="Draw key" value={result.drawKey} what="the draw key" /> : undefined}
        >
          That number, mixed with a secret that the site had sealed beforehand, gave the flips.{' '}
          {countOf(result.flips.flips, 'flip')} made {countOf(result.flips.coins, 'coin')}; the coins {led}.
        </Step>
        {results.map(({ witness, statement }) => (
          <Step
            key={statement.digest}
            at={statement.at}
            zone={zone}
            title={statement.verdict === 'confirmed' ? 'Confirmed' : 'Refused'}
            exact={<Digest label="Statement" value={statement.digest} what={`the statement of ${witness.name}`} />}
          >
            {witness.name}, {witness.role},{' '}
            {statement.verdict === 'confirmed' ? 'confirmed the result.' : 'refused to confirm the result.'}
            {statement.words ? ` In their words: “${statement.words}”` : ''}
          </Step>
        ))}
      </ol>
    </Part>
  )
}

interface StepProps {
  readonly at: string
  readonly zone: string
  readonly title: string
  readonly exact?: React.ReactNode
  readonly children: React.ReactNode
}

function Step({ at, zone, title, exact, children }: StepProps) {
  return (
    <li>
      <time dateTime={at}>{formatBrief(at, zone)}</time>
      <div>
        <h3>{title}</h3>
        <p>{children}</p>
        {exact ? <div className="exact">{exact}</div> : null}
      </div>
    </li>
  )
}

export function ExactFiguresPart({ draw }: { readonly draw: DrawPage }) {
  const { seal, result } = draw
  if (!seal || !result) return null
  const { flips } = result
  return (
    <Part title="Exact figures">
      <Facts
        exact
        items={[
          ['Seal', <Digest key="seal" value={seal.digest} what="the seal" />],
          ['Merkle root', <Digest key="root" value={seal.root} what="the Merkle root" />],
          result.beacon ? ['Beacon round', formatNumber(result.beacon.round)] : null,
          result.beacon
            ? ['Its signature', <Digest key="signature" value={result.beacon.signature} what="the round’s signature" />]
            : null,
          seal.seedCommit
            ? ['Seed, promised', <Digest key="commit" value={seal.seedCommit} what="the commitment to the seed" />]
            : null,
          result.seed ? ['Seed, opened', <Digest key="seed" value={result.seed} what="the opened seed" />] : null,
          result.drawKey ? ['Draw key', <Digest key="key" value={result.drawKey} what="the draw key" />] : null,
          ['Transcript', <Digest key="transcript" value={result.transcriptDigest} what="the transcript’s digest" />],
          ['Result', <Digest key="result" value={result.digest} what="the result" />],
          ['Site’s key', <Digest key="site" value={seal.keyFingerprint} what="the fingerprint of the site’s key" />],
        ]}
      />
      {flips.histogram.length > 0 ? (
        <div className="mt-unit-3">
          <h3>Flips used</h3>
          <p className="measure mb-unit">
            {countOf(flips.coinsWithFlips, 'coin')} took {countOf(flips.flips, 'flip')}. The theory expects{' '}
            {flips.expected}.
            {flips.coins > flips.coinsWithFlips
              ? ` ${countOf(flips.coins - flips.coinsWithFlips, 'more coin', 'more coins')} needed none, because nobody was left on one side.`
              : ''}{' '}
            The bars show how many coins took one flip, two flips and so on; the upright mark is what the theory
            expects.
          </p>
          <FlipsChart rows={flips.histogram} />
        </div>
      ) : null}
    </Part>
  )
}

export function WitnessesPart({ draw }: { readonly draw: DrawPage }) {
  const statements = draw.witnesses.flatMap((witness) => witness.statements)
  if (draw.witnesses.length === 0) return null
  return (
    <Part title={draw.witnesses.length === 1 ? 'The witness' : 'The witnesses'}>
      <ul className="witnesses">
        {draw.witnesses.map((witness) => (
          <li key={witness.name}>
            <p>
              <b>{witness.name}</b>, {witness.role}. Connection with the organisation: {witness.connection}
            </p>
            {witness.statements.map((statement) => (
              <div className="note" key={statement.digest}>
                {statement.verdict === 'confirmed' ? 'Confirmed' : 'Refused to confirm'} the {statement.about} on{' '}
                {formatBrief(statement.at, draw.timeZone)}.{statement.words ? ` “${statement.words}”` : ''}
              </div>
            ))}
            {witness.statements.length === 0 ? <p className="note mt-0">Has made no statement yet.</p> : null}
          </li>
        ))}
      </ul>
      {statements.some((statement) => statement.verdict === 'refused') ? (
        <p className="note measure mt-unit">
          A refusal is published in the witness’s own words. It changes nothing in the list or the result.
        </p>
      ) : null}
    </Part>
  )
}
