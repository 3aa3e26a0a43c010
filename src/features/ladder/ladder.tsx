import type { ReactNode } from 'react'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Bar, unshownFigures } from './bar.tsx'
import { coinShape, fan, type LadderCoin } from '#shared/sampling/ladder-shape.ts'
import { branchBand, branchStrip, keptWords, type BranchPlace } from './branch.ts'
import { isLong, Weighing } from './weighing.tsx'
import { coinWords } from './words.ts'

interface LadderProps {
  readonly coins: readonly LadderCoin[]
  /** What stands at the foot: who the walk led to. */
  readonly end: ReactNode
  /** The counterfoil beside the foot. */
  readonly endNote: string
  readonly endTitle?: string
  /** The foot tells of somebody else: an outline, not the metal of the last coin. */
  readonly apart?: boolean
  /** Sets the coins in motion, one after the other's end state; reduced motion shows the end state at once. */
  readonly play?: boolean
  /** One entrant's place in every coin: their tickets are filled in ink. */
  readonly branch?: readonly BranchPlace[]
}

/** A walk, coin by coin: each row one coin, the chosen side opening out to the next row's full width. */
export function Ladder({
  coins,
  end,
  endNote,
  endTitle = 'One entrant',
  apart = false,
  play = false,
  branch,
}: LadderProps) {
  const last = coins.at(-1)
  return (
    <ol className={play ? 'ladder play' : 'ladder'}>
      {coins.map((coin, index) => (
        <CoinRow key={index} coin={coin} number={index + 1} from={coins[index - 1]?.[3]} place={branch?.[index]} />
      ))}
      <li className={`coin-row${last ? ` from-${last[3]}` : ''}`}>
        <div className="cap">
          <h3>{endTitle}</h3>
          <p>{endNote}</p>
        </div>
        <div className={`foot${apart ? ' apart' : ''}${last ? ` from-${last[3]}` : ''}`}>{end}</div>
      </li>
    </ol>
  )
}

interface CoinRowProps {
  readonly coin: LadderCoin
  readonly number: number
  readonly from: 'H' | 'T' | undefined
  readonly place: BranchPlace | undefined
}

function CoinRow({ coin, number, from, place }: CoinRowProps) {
  const shape = coinShape(coin)
  const words = coinWords(coin)
  const lines = fan(shape)
  const long = isLong(coin)
  const unshown = unshownFigures(coin)
  const band = place ? branchBand(coin, place, lines.width) : null
  return (
    <li className={`coin-row${from ? ` from-${from}` : ' one'}`}>
      <div className="cap">
        <h3>Coin {number}</h3>
        {place ? (
          <p>
            Your {formatNumber(place.mine)} of {formatNumber(place.total)}
            <span className="block">{keptWords(place)}</span>
          </p>
        ) : (
          <p>{countOf(shape.total, 'ticket')} in</p>
        )}
        {lines.ticketsPerStrip > 1 ? (
          <p className="wide">Each line of the fan is {formatNumber(lines.ticketsPerStrip)} tickets.</p>
        ) : null}
      </div>
      <div>
        <div className={`panel${from ? '' : ' first'}${long ? ' long' : ''}${shape.certain ? ' certain' : ''}`}>
          {shape.certain ? null : <Weighing coin={coin} />}
          <p className="say">
            {words.account} <b>{words.verdict}</b>
            {unshown ? (
              <span className={unshown.everywhere ? 'unshown' : 'unshown narrow'}> {unshown.words}</span>
            ) : null}
          </p>
        </div>
        <Bar coin={coin} strip={place ? branchStrip(place) : undefined} />
        <svg
          className={`fan ${coin[3]}`}
          viewBox={`0 0 ${lines.width} 100`}
          preserveAspectRatio="none"
          aria-hidden="true"
        >
          {lines.fine ? <path className="fine" d={lines.fine} /> : null}
          {lines.hair ? <path d={lines.hair} /> : null}
          {band ? <path className="mine" d={band} /> : null}
          <path className="lip" d={lines.lip} />
        </svg>
      </div>
    </li>
  )
}

interface WinnerProps {
  readonly name: ReactNode
  readonly children?: ReactNode
}

/** The foot of a ladder: one entrant, in the metal of the last coin. */
export function Winner({ name, children }: WinnerProps) {
  return (
    <>
      <p className="display">{name}</p>
      {children}
    </>
  )
}
