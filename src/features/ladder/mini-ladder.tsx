import { countOf } from '#src/ui/format-number.ts'
import { coinShape, fan, trim, type LadderCoin } from './geometry.ts'
import { walkSides } from './words.ts'

interface MiniSize {
  readonly width: number
  readonly bar: number
  readonly fan: number
}

/** Bars 7 and fans 14 high; long walks are drawn closer, so that 20 coins stay beside their winner. */
export function miniSize(coins: number, width = 250): MiniSize {
  if (coins <= 7) return { width, bar: 7, fan: 14 }
  if (coins <= 13) return { width, bar: 5, fan: 8 }
  return { width, bar: 4, fan: 5 }
}

export function miniHeight(coins: number, size = miniSize(coins)): number {
  return coins * (size.bar + size.fan) + size.bar + 2
}

interface MiniLadderProps {
  readonly coins: readonly LadderCoin[]
  readonly size?: MiniSize
  /** Keeps at least this height, where a taller drawing stood before. */
  readonly keepHeight?: number | undefined
}

/** A walk, small: the same proportions without figures. */
export function MiniLadder({ coins, size = miniSize(coins.length), keepHeight = 0 }: MiniLadderProps) {
  const height = Math.max(keepHeight, miniHeight(coins.length, size))
  const last = coins.at(-1)?.[3] ?? 'H'
  return (
    <svg
      className="mini"
      viewBox={`0 0 ${size.width} ${height}`}
      width={size.width}
      height={height}
      role="img"
      aria-label={
        coins.length === 0
          ? 'No coin was needed'
          : `Small ladder: ${countOf(coins.length, 'coin')}, ${walkSides(coins)}`
      }
    >
      {coins.map((coin, index) => (
        <MiniCoin key={index} coin={coin} y={1 + index * (size.bar + size.fan)} size={size} />
      ))}
      <rect
        className={`won ${last === 'H' ? 'h' : 't'}`}
        y={1 + coins.length * (size.bar + size.fan)}
        width={size.width}
        height={size.bar}
      />
    </svg>
  )
}

function MiniCoin({ coin, y, size }: { readonly coin: LadderCoin; readonly y: number; readonly size: MiniSize }) {
  const shape = coinShape(coin)
  const split = (shape.leftPercent / 100) * size.width
  const won = shape.heads ? 'h' : 't'
  const lost = shape.heads ? 't' : 'h'
  // No side is under 3 units here either.
  const lostWidth = Math.max(3, shape.heads ? size.width - split : split)
  const lines = fan(shape, size.fan, 24, size.width)
  return (
    <g transform={`translate(0 ${y})`}>
      <rect
        className={`won ${won}`}
        x={shape.heads ? 0 : trim(split)}
        width={trim(shape.heads ? split : size.width - split)}
        height={size.bar}
      />
      {shape.certain ? null : (
        <rect
          className={`lost ${lost}`}
          x={trim(shape.heads ? size.width - lostWidth + 0.5 : 0.5)}
          y="0.5"
          width={trim(lostWidth - 1)}
          height={size.bar - 1}
        />
      )}
      <path className={`hair ${won}`} transform={`translate(0 ${size.bar})`} d={lines.fine + lines.hair + lines.lip} />
    </g>
  )
}
