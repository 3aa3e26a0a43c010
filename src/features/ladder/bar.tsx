import { formatNumber } from '#src/ui/format-number.ts'
import { coinShape, trim, type LadderCoin } from '#shared/sampling/ladder-shape.ts'
import { sideLabel } from './geometry.ts'
import type { Strip } from './branch.ts'
import { barWords } from './words.ts'

/** The tickets still in, split in proportion; the chosen side filled, the other pale. No side is under 3 px. */
export function Bar({ coin, strip }: { readonly coin: LadderCoin; readonly strip?: Strip | undefined }) {
  const shape = coinShape(coin)
  const percent = trim(shape.leftPercent)
  const h = shape.heads ? 'won' : 'lost'
  const t = shape.heads ? 'lost' : 'won'
  return (
    <div className="bar" role="img" aria-label={barWords(coin)}>
      <svg className="bar-shape" width="100%" height="100%" aria-hidden="true">
        {shape.right > 0 ? (
          <rect className={`t ${t}`} x={`${percent}%`} width={`${trim(100 - shape.leftPercent)}%`} height="100%" />
        ) : null}
        {shape.left > 0 ? <rect className={`h ${h}`} width={`${percent}%`} height="100%" /> : null}
        {/* A sliver keeps 3 px, whatever the width of the screen. */}
        {shape.left > 0 && shape.leftPercent < 2 ? <rect className={`h ${h} least`} width="3" height="100%" /> : null}
        {shape.right > 0 && shape.leftPercent > 98 ? (
          <rect className={`t ${t} least`} x="100%" width="3" height="100%" transform="translate(-3 0)" />
        ) : null}
      </svg>
      {strip ? <OwnStrip strip={strip} /> : null}
      <Side side="h" won={shape.heads} tickets={shape.left} percent={shape.leftPercent} />
      <Side side="t" won={!shape.heads} tickets={shape.right} percent={100 - shape.leftPercent} />
    </div>
  )
}

/** One entrant's own tickets, in ink along the foot of the bar; at least 4 px wide, and never beyond its end. */
function OwnStrip({ strip }: { readonly strip: Strip }) {
  if (strip.width === 0) return null
  const atEnd = strip.x + strip.width > 99
  return (
    <svg className="own-strip" width="100%" height="14" aria-hidden="true">
      {atEnd ? (
        <rect x="100%" width="4" height="100%" transform="translate(-4 0)" />
      ) : (
        <rect x={`${trim(strip.x)}%`} width="4" height="100%" />
      )}
      <rect x={`${trim(strip.x)}%`} width={`${trim(strip.width)}%`} height="100%" />
    </svg>
  )
}

/** The figures that do not fit into a bar, as a sentence; `everywhere` false where wide screens do show them. */
export function unshownFigures(coin: LadderCoin): { readonly words: string; readonly everywhere: boolean } | null {
  const shape = coinShape(coin)
  const sides = [
    { tickets: shape.left, percent: shape.leftPercent, name: 'left' },
    { tickets: shape.right, percent: 100 - shape.leftPercent, name: 'right' },
  ]
  for (const side of sides) {
    const figure = formatNumber(side.tickets)
    const label = sideLabel(side.percent, figure.length)
    if (side.tickets > 0 && label.figure !== 'everywhere') {
      return { words: `${figure} on the ${side.name}.`, everywhere: label.figure === 'nowhere' }
    }
  }
  return null
}

interface SideProps {
  readonly side: 'h' | 't'
  readonly won: boolean
  readonly tickets: number
  readonly percent: number
}

function Side({ side, won, tickets, percent }: SideProps) {
  if (tickets === 0) return null
  const figure = formatNumber(tickets)
  const label = sideLabel(percent, figure.length)
  if (label.figure === 'nowhere') return null
  return (
    <span
      className={`side ${side} ${won ? 'won' : 'lost'}${label.figure === 'wide' ? ' wide' : ''}${label.glyph ? '' : ' tiny'}`}
      aria-hidden="true"
    >
      {label.glyph ? <i className={side === 'h' ? 'disc' : 'ring'} /> : null}
      <b>{figure}</b>
      {label.word ? <em>{side === 'h' ? 'left' : 'right'}</em> : null}
    </span>
  )
}
