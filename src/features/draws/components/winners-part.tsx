import { miniHeight, miniSize } from '#shared/sampling/ladder-shape.ts'
import type { DrawPage, PickSummary } from '#shared/schemas/api/public.ts'
import { MiniLadder } from '#src/features/ladder/mini-ladder.tsx'
import { walkSize } from '#src/features/ladder/words.ts'
import { awardWords } from '#src/lib/award-words.ts'
import { fraction, oneIn } from '#src/ui/chance-words.ts'
import { DataTable } from '#src/ui/data-table.tsx'
import { capitalise, countOf, formatNumber, ordinal } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { pickName } from '../words.ts'

/** So many winners are shown large, each with a small ladder; the others in a table. */
const LARGE = 20

export function WinnersPart({ draw, arrived }: { readonly draw: DrawPage; readonly arrived: boolean }) {
  const { result } = draw
  if (!result) return null
  const prizes = result.picks.filter((pick) => pick.award.kind === 'prize')
  const depth = arrived ? deepest(draw) : 0
  return (
    <Part title="Who won" id="winners">
      <ol className="winners">
        {prizes.slice(0, LARGE).map((pick) => (
          <WinnerRow key={pick.pick} draw={draw} pick={pick} depth={depth} />
        ))}
      </ol>
      {prizes.length > LARGE ? (
        <div className="mt-unit-3">
          <PickTable
            draw={draw}
            picks={prizes.slice(LARGE)}
            caption={`The other ${formatNumber(prizes.length - LARGE)} prizes`}
          />
        </div>
      ) : null}
      {result.pickCount > result.picks.length ? (
        <p className="note measure mt-unit">
          The first {formatNumber(result.picks.length)} of {formatNumber(result.pickCount)} picks are on this page. All
          of them are in{' '}
          <Link plain to={`/draws/${draw.slug}/result.json`}>
            result.json
          </Link>{' '}
          and{' '}
          <Link plain to={`/draws/${draw.slug}/labels.jsonl`}>
            labels.jsonl
          </Link>
          .
        </p>
      ) : null}
    </Part>
  )
}

/** The most coins that a walk over this list can take: the height kept free for a ladder. */
function deepest(draw: DrawPage): number {
  return Math.max(1, Math.ceil(Math.log2(draw.seal?.entrants ?? 2)))
}

interface WinnerRowProps {
  readonly draw: DrawPage
  readonly pick: PickSummary
  readonly depth: number
}

function WinnerRow({ draw, pick, depth }: WinnerRowProps) {
  const name = pick.award.kind === 'prize' ? pick.award.name : ''
  return (
    <li>
      <div>
        <p className="prize">
          <b>{awardWords(pick.award)}</b> {name}
        </p>
        <p className={pick.label === null ? 'who quiet' : 'who'}>{pickName(pick)}</p>
        <ChanceNote pick={pick} />
      </div>
      <div className="walk">
        <MiniLadder coins={pick.coins} keepHeight={depth > 0 ? miniHeight(depth) : undefined} />
        <Link to={`/draws/${draw.slug}/picks/${pick.pick}`}>
          {walkSize(pick.coins)}
          <span className="vh">: the walk to {awardWords(pick.award)}</span>
        </Link>
      </div>
    </li>
  )
}

export function ChanceNote({ pick }: { readonly pick: PickSummary }) {
  return (
    <p className="note">
      {formatNumber(pick.ticketsIn)} of the {countOf(pick.remaining, 'ticket')} then in:{' '}
      {oneIn(pick.ticketsIn, pick.remaining)} <span className="nb">({fraction(pick.ticketsIn, pick.remaining)})</span>
    </p>
  )
}

/** The prizes in the order of the draw, each with a place for its winner, as the seal has them. */
export function PrizesToCome({ draw }: { readonly draw: DrawPage }) {
  const items = draw.prizes.flatMap((prize, index) =>
    Array.from({ length: Math.min(prize.quantity, LARGE) }, (_, item) => ({
      prize,
      position: index + 1,
      item: item + 1,
    })),
  )
  if (items.length > LARGE) return null
  const tickets = draw.seal?.tickets ?? 0
  const depth = deepest(draw)
  return (
    <Part title="Who wins" id="winners" note={<p>Drawn in this order</p>}>
      <ol className="winners">
        {items.map(({ prize, position, item }) => (
          <li key={`${prize.id} ${item}`}>
            <div>
              <p className="prize">
                <b>
                  {capitalise(ordinal(position))} prize
                  {prize.quantity > 1 ? `, ${item} of ${prize.quantity}` : ''}
                </b>{' '}
                {prize.name}
              </p>
              <p className="who quiet">To be drawn</p>
              <p className="note">
                {position === 1 && item === 1
                  ? `Each of the ${countOf(tickets, 'ticket')} has the same chance: ${oneIn(1, tickets)}`
                  : 'Each ticket then still in has the same chance.'}
              </p>
            </div>
            <div className="walk">
              <LadderToCome depth={depth} />
              <span className="note block">No coin tossed yet</span>
            </div>
          </li>
        ))}
      </ol>
    </Part>
  )
}

/** The rows of the longest walk that this list can take, empty: the place of the ladder that comes. */
function LadderToCome({ depth }: { readonly depth: number }) {
  const size = miniSize(depth)
  return (
    <svg
      className="mini to-come"
      viewBox={`0 0 ${size.width} ${miniHeight(depth)}`}
      width={size.width}
      height={miniHeight(depth)}
      aria-hidden="true"
    >
      {Array.from({ length: depth + 1 }, (_, row) => (
        <rect key={row} x="0.5" y={1.5 + row * (size.bar + size.fan)} width={size.width - 1} height={size.bar - 1} />
      ))}
    </svg>
  )
}

export function ReservesPart({ draw }: { readonly draw: DrawPage }) {
  const reserves = draw.result?.picks.filter((pick) => pick.award.kind === 'reserve') ?? []
  if (reserves.length === 0) return null
  return (
    <Part
      title="Reserves"
      note={<p>Called in this order if a prize is refused or not claimed. Named only when called.</p>}
    >
      <PickTable draw={draw} picks={reserves} />
    </Part>
  )
}

function PickTable({
  draw,
  picks,
  caption,
}: {
  readonly draw: DrawPage
  readonly picks: readonly PickSummary[]
  readonly caption?: string
}) {
  return (
    <DataTable
      caption={caption}
      rows={picks}
      rowKey={(pick) => String(pick.pick)}
      columns={[
        { key: 'award', head: 'Place', rowHead: true, cell: (pick) => awardWords(pick.award) },
        { key: 'who', head: 'Entrant', cell: (pick) => pickName(pick) },
        {
          key: 'chance',
          head: 'Tickets then in',
          numeric: true,
          cell: (pick) => `${formatNumber(pick.ticketsIn)} of ${formatNumber(pick.remaining)}`,
        },
        {
          key: 'walk',
          head: 'The walk',
          cell: (pick) => (
            <Link to={`/draws/${draw.slug}/picks/${pick.pick}`}>
              {walkSize(pick.coins)}
              <span className="vh"> to {awardWords(pick.award)}</span>
            </Link>
          ),
        },
      ]}
    />
  )
}
