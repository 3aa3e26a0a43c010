import { useEffect } from 'react'
import { Ladder, Winner } from '#src/features/ladder/ladder.tsx'
import { awardInSentence, awardWords } from '#src/lib/award-words.ts'
import { Button } from '#src/ui/button.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import { Skeleton } from '#src/ui/states.tsx'
import type { CheckControl } from '../use-check.ts'
import type { PickRow } from '../messages.ts'
import { printable } from '../words.ts'

/** The picks of an archive that holds, each with its coins for whoever wants to see them. */
export function PicksPart({ control }: { readonly control: CheckControl }) {
  const { view } = control
  const { held, picks, walk } = view
  if (!held || picks.length === 0) return null
  const shown = walk ? picks.find(({ pick }) => pick === walk.pick) : undefined
  const rest = held.draw.pickCount - picks.length
  return (
    <>
      <Part title="The picks" note={<p>In the order of the draw, as they lie in the archive</p>}>
        <ul className="check-picks">
          {picks.map((row) => (
            <li key={row.pick}>
              <span className="place">
                <b>{awardWords(row.award)}</b>
                {row.award.kind === 'prize' ? ` ${printable(row.award.name)}` : ''}
              </span>
              <span>{nameOf(row)}</span>
              <Button small quiet aria-pressed={walk?.pick === row.pick} onClick={() => control.askWalk(row.pick)}>
                See its coins<span className="vh"> of {awardInSentence(row.award)}</span>
              </Button>
            </li>
          ))}
        </ul>
        {view.trouble ? (
          <Notice fault>
            <p>{view.trouble}</p>
          </Notice>
        ) : null}
        {rest > 0 ? (
          <p className="mt-unit-2">
            <Button quiet onClick={() => control.askPicks(picks.length)}>
              Show more: {formatNumber(rest)} are left
            </Button>
          </p>
        ) : null}
      </Part>
      {walk && shown ? <Walk row={shown} coins={walk.coins} /> : null}
    </>
  )
}

const WALK = 'check-walk'

type WalkProps = { readonly row: PickRow; readonly coins: NonNullable<CheckControl['view']['walk']>['coins'] }

function Walk({ row, coins }: WalkProps) {
  const arrived = coins !== null
  // The coins stand below a long list: whoever asked for them is taken there.
  useEffect(() => {
    if (arrived) document.getElementById(WALK)?.focus()
  }, [arrived, row.pick])
  if (coins === null) {
    return (
      <Part title={awardWords(row.award)}>
        <Skeleton lines={4} label="Reading the coins" />
      </Part>
    )
  }
  const last = coins.at(-1)
  const ticketsIn = last ? (last[3] === 'H' ? last[0] : last[1]) : row.remaining
  return (
    <>
      <Part title={`${awardWords(row.award)}, coin by coin`}>
        <p className="measure" id={WALK} tabIndex={-1}>
          {countOf(row.remaining, 'ticket')} {row.remaining === 1 ? 'was' : 'were'} in.{' '}
          {coins.length === 0
            ? 'Only one entrant was left, so no coin was needed.'
            : `${countOf(coins.length, 'coin')} led to the entrant at place ${formatNumber(row.leaf)} of the sealed list.`}
        </p>
      </Part>
      <section className="ladder-part" aria-label="The walk, coin by coin">
        <Ladder
          coins={coins}
          endNote={countOf(ticketsIn, 'ticket')}
          end={
            <Winner name={nameOf(row)}>
              <p>
                {formatNumber(ticketsIn)} of the {countOf(row.remaining, 'ticket')} won {awardInSentence(row.award)}.
              </p>
            </Winner>
          }
        />
      </section>
    </>
  )
}

function nameOf({ label, award }: PickRow): string {
  if (label !== null) return printable(label)
  return award.kind === 'reserve' ? 'Named when called' : 'Name withheld'
}
