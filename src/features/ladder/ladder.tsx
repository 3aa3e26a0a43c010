import type { ReactNode } from 'react'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Bar, unshownFigures } from './bar.tsx'
import { coinShape, fan, type LadderCoin } from '#shared/sampling/ladder-shape.ts'
import { isLong, Weighing } from './weighing.tsx'
import { coinWords } from './words.ts'

interface LadderProps {
  readonly coins: readonly LadderCoin[]
  /** What stands at the foot: who the walk led to. */
  readonly end: ReactNode
  /** The counterfoil beside the foot. */
  readonly endNote: string
  readonly endTitle?: string
  /** Sets the coins in motion, one after the other's end state; reduced motion shows the end state at once. */
  readonly play?: boolean
}

/** A walk, coin by coin: each row one coin, the chosen side opening out to the next row's full width. */
export function Ladder({ coins, end, endNote, endTitle = 'One entrant', play = false }: LadderProps) {
  const last = coins.at(-1)
  return (
    <ol className={play ? 'ladder play' : 'ladder'}>
      {coins.map((coin, index) => (
        <CoinRow key={index} coin={coin} number={index + 1} from={coins[index - 1]?.[3]} />
      ))}
      <li className={`coin-row${last ? ` from-${last[3]}` : ''}`}>
        <div className="cap">
          <h3>{endTitle}</h3>
          <p>{endNote}</p>
        </div>
        <div className={`foot${last ? ` from-${last[3]}` : ''}`}>{end}</div>
      </li>
    </ol>
  )
}

interface CoinRowProps {
  readonly coin: LadderCoin
  readonly number: number
  readonly from: 'H' | 'T' | undefined
}

function CoinRow({ coin, number, from }: CoinRowProps) {
  const shape = coinShape(coin)
  const words = coinWords(coin)
  const lines = fan(shape)
  const long = isLong(coin)
  const unshown = unshownFigures(coin)
  return (
    <li className={`coin-row${from ? ` from-${from}` : ' one'}`}>
      <div className="cap">
        <h3>Coin {number}</h3>
        <p>{countOf(shape.total, 'ticket')} in</p>
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
        <Bar coin={coin} />
        <svg
          className={`fan ${coin[3]}`}
          viewBox={`0 0 ${lines.width} 100`}
          preserveAspectRatio="none"
          aria-hidden="true"
        >
          {lines.fine ? <path className="fine" d={lines.fine} /> : null}
          {lines.hair ? <path d={lines.hair} /> : null}
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
