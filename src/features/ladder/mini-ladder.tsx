import { countOf } from '#src/ui/format-number.ts'
import { miniCoin, miniHeight, miniSize, type LadderCoin, type MiniSize } from '#shared/sampling/ladder-shape.ts'
import { walkSides } from './words.ts'

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
  const shape = miniCoin(coin, size)
  const [won, lost] = shape.heads ? ['h', 't'] : ['t', 'h']
  return (
    <g transform={`translate(0 ${y})`}>
      <rect className={`won ${won}`} x={shape.won.x} width={shape.won.width} height={size.bar} />
      {shape.lost ? (
        <rect className={`lost ${lost}`} x={shape.lost.x} y="0.5" width={shape.lost.width} height={size.bar - 1} />
      ) : null}
      <path className={`hair ${won}`} transform={`translate(0 ${size.bar})`} d={shape.lines} />
    </g>
  )
}
