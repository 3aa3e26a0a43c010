import type { EntryPick, EntryView, EntryWalk } from '#shared/schemas/api/entry.ts'
import type { Page } from '#src/features/entry/page-of.ts'
import { branchWords } from '#src/features/ladder/branch.ts'
import { ChanceProduct } from '#src/features/ladder/chance.tsx'
import { Ladder, Winner } from '#src/features/ladder/ladder.tsx'
import { awardInSentence, awardWords } from '#src/lib/award-words.ts'
import { fraction, oneIn } from '#src/ui/chance-words.ts'
import { DataTable } from '#src/ui/data-table.tsx'
import { capitalise, countOf, formatNumber } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { pickWords, reachedWords } from '../words.ts'
import { Steps } from './steps.tsx'

interface BranchPartProps {
  readonly entry: EntryView
  readonly walk: EntryWalk
}

/** One pick along the entrant's branch: in words, then coin by coin. */
export function BranchPart({ entry, walk }: BranchPartProps) {
  const coins = walk.walk.map(({ coin }) => coin)
  const mine = countOf(walk.mine, 'ticket')
  return (
    <>
      <Part
        title="Your branch"
        id="branch"
        note={
          <p>
            {awardWords(walk.award)}.
            {walk.mine > 0 ? (
              <>
                {' '}
                The <b>dark band</b> is your {mine}.
              </>
            ) : null}
          </p>
        }
      >
        <p className="measure">{pickWords(walk)}</p>
        {walk.mine > 0 ? <p className="measure">{branchWords(walk.walk, coins)}</p> : null}
      </Part>
      {walk.mine > 0 ? (
        <section className="ladder-part" aria-label={`${awardWords(walk.award)}, coin by coin along your branch`}>
          <Ladder coins={coins} branch={walk.walk} {...footOf(entry, walk)} />
        </section>
      ) : null}
    </>
  )
}

function footOf(entry: EntryView, walk: EntryWalk) {
  const mine = countOf(walk.mine, 'ticket')
  if (walk.turnedAt === null) {
    return {
      endTitle: 'You',
      endNote: mine,
      end: (
        <Winner name={walk.award.kind === 'prize' ? 'The walk came to you' : `You are reserve ${walk.award.reserve}`}>
          <p>
            Your {mine} of the {countOf(walk.remaining, 'ticket')} won {awardInSentence(walk.award)}.
          </p>
          <ChanceProduct coins={walk.walk.map(({ coin }) => coin)} ticketsIn={walk.mine} remaining={walk.remaining} />
        </Winner>
      ),
    }
  }
  const more = walk.coins - walk.turnedAt
  const whom = walk.winner.label ?? 'one other entrant'
  // A label that ends in an initial brings its own full stop.
  const stop = whom.endsWith('.') ? '' : '.'
  return {
    apart: true,
    endTitle: 'Turned away',
    endNote: more === 0 ? 'at the last coin' : `at coin ${walk.turnedAt} of ${walk.coins}`,
    end: (
      <p>
        {more === 0 ? (
          <b>
            {countOf(walk.winner.tickets, 'ticket')} of {whom}
            {stop}
          </b>
        ) : (
          <b>
            The walk went on without you, {countOf(more, 'coin', 'coins', true)} more, to{' '}
            {countOf(walk.winner.tickets, 'ticket')} of {whom}
            {stop}
          </b>
        )}{' '}
        Your band of {formatNumber(walk.mine)} ended in the bar above.{' '}
        <Link to={`/draws/${entry.draw.slug}/picks/${walk.pick}`}>The whole walk, coin by coin</Link>
      </p>
    ),
  }
}

interface PicksPartProps {
  readonly entry: EntryView
  readonly picks: Page<EntryPick>
  readonly shown: number
  /** The private page with another pick's branch, or another page of picks. */
  readonly href: (to: { readonly pick: number; readonly page: number }) => string
}

/** Every pick: their chance, exactly, and how far the walk came with them. */
export function PicksPart({ entry, picks, shown, href }: PicksPartProps) {
  return (
    <Part
      title={picks.total === 1 ? 'The one pick' : `All ${countOf(picks.total, 'pick', 'picks', true)}`}
      note={entry.draw.rule === 'one-prize-each' ? <p>Who wins leaves the draw with all tickets</p> : undefined}
    >
      <DataTable
        className="near"
        rows={picks.items}
        rowKey={(pick) => String(pick.pick)}
        columns={[
          {
            key: 'award',
            head: 'Prize',
            rowHead: true,
            cell: (pick) =>
              pick.pick === shown ? (
                <span>{awardWords(pick.award)}</span>
              ) : (
                <Link to={`${href({ pick: pick.pick, page: picks.page })}#branch`}>{awardWords(pick.award)}</Link>
              ),
          },
          {
            key: 'chance',
            head: 'Your chance',
            numeric: true,
            cell: (pick) => capitalise(oneIn(pick.mine, pick.remaining)),
          },
          {
            key: 'exactly',
            head: 'exactly',
            numeric: true,
            cell: (pick) => <span className="mono">{fraction(pick.mine, pick.remaining)}</span>,
          },
          {
            key: 'reached',
            head: 'How far the walk came with you',
            cell: (pick) => (
              <>
                <Steps pick={pick} /> <span className="nb">{reachedWords(pick)}</span>
              </>
            ),
          },
        ]}
      />
      <Pager
        page={picks.page}
        pageSize={picks.pageSize}
        total={picks.total}
        noun="picks"
        href={(page) => href({ pick: shown, page })}
      />
    </Part>
  )
}
