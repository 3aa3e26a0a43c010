import { countOf, formatNumber } from './format-number.ts'

const DOT = 16.5
const COLUMN = 36

interface LeafChartProps {
  /** Tickets of each entrant, in the order of the sealed list. */
  readonly tickets: readonly number[]
  /** Indexes of the entrants who won. */
  readonly winners: readonly number[]
}

/** One stack an entrant, one dot a ticket; where dots would not fit, one upright bar an entrant. */
export function LeafChart({ tickets, winners }: LeafChartProps) {
  const won = new Set(winners)
  const most = Math.max(1, ...tickets)
  const label = `Tickets of each of ${countOf(tickets.length, 'entrant')}, from ${formatNumber(Math.min(...tickets))} to ${formatNumber(most)}; the filled ones won`
  if (tickets.length <= 25 && most <= 24) return <DotStacks tickets={tickets} won={won} most={most} label={label} />
  return <Bars values={tickets} filled={(index) => won.has(index)} label={label} />
}

interface DotStacksProps {
  readonly tickets: readonly number[]
  readonly won: ReadonlySet<number>
  readonly most: number
  readonly label: string
}

function DotStacks({ tickets, won, most, label }: DotStacksProps) {
  const half = Math.ceil(tickets.length / 2)
  const phone = tickets.length > 12 ? [tickets.slice(0, half), tickets.slice(half)] : [tickets]
  return (
    <>
      <DotRow className="stacks desk" tickets={tickets} first={0} columns={25} won={won} most={most} label={label} />
      {phone.map((row, index) => (
        <DotRow
          key={index}
          className="stacks phone"
          tickets={row}
          first={index * half}
          columns={Math.max(half, 8)}
          won={won}
          most={Math.max(1, ...row)}
          label={index === 0 ? label : 'The same, continued'}
        />
      ))}
    </>
  )
}

interface DotRowProps extends DotStacksProps {
  readonly className: string
  readonly first: number
  readonly columns: number
}

function DotRow({ className, tickets, first, columns, won, most, label }: DotRowProps) {
  const height = most * DOT + 10
  return (
    <svg className={className} viewBox={`0 0 ${columns * COLUMN} ${height}`} role="img" aria-label={label}>
      <path className="axis" d={`M0 ${height - 1.5}H${tickets.length * COLUMN}`} />
      {tickets.flatMap((count, column) =>
        Array.from({ length: count }, (_, row) => {
          const filled = won.has(first + column)
          return (
            <circle
              key={`${column} ${row}`}
              className={filled ? 'dot-in' : 'dot-out'}
              cx={column * COLUMN + COLUMN / 2}
              cy={height - 12 - row * DOT}
              r={filled ? 6.4 : 5.5}
            />
          )
        }),
      )}
    </svg>
  )
}

interface BarsProps {
  readonly values: readonly number[]
  readonly filled: (index: number) => boolean
  readonly label: string
}

function Bars({ values, filled, label }: BarsProps) {
  const most = Math.max(1, ...values)
  const step = 900 / values.length
  const width = Math.max(1, step * 0.72)
  return (
    <svg className="stacks" viewBox="0 0 900 190" role="img" aria-label={label}>
      {values.map((value, index) => {
        const height = Math.max(value > 0 ? 2 : 0, (value / most) * 180)
        return (
          <rect
            key={index}
            className={filled(index) ? 'dot-in' : 'dot-out'}
            x={round(index * step + (step - width) / 2)}
            y={round(188 - height)}
            width={round(width)}
            height={round(height)}
          />
        )
      })}
      <path className="axis" d="M0 189H900" />
    </svg>
  )
}

const round = (value: number) => Math.round(value * 100) / 100

export interface TicketCount {
  readonly tickets: number
  readonly entrants: number
}

/** Up to `most` groups of ticket counts, each as wide as the others: for lists of thousands. */
export function groupCounts(
  counts: readonly TicketCount[],
  most = 20,
): readonly { readonly from: number; readonly to: number; readonly entrants: number }[] {
  if (counts.length === 0) return []
  const low = Math.min(...counts.map((count) => count.tickets))
  const high = Math.max(...counts.map((count) => count.tickets))
  const width = Math.ceil((high - low + 1) / most)
  const groups = Array.from({ length: Math.ceil((high - low + 1) / width) }, (_, index) => ({
    from: low + index * width,
    to: Math.min(high, low + (index + 1) * width - 1),
    entrants: 0,
  }))
  for (const count of counts) {
    const group = groups[Math.floor((count.tickets - low) / width)]
    if (group) group.entrants += count.entrants
  }
  return groups
}

/** How many entrants held how many tickets. */
export function CountChart({ counts }: { readonly counts: readonly TicketCount[] }) {
  const groups = groupCounts(counts)
  const most = Math.max(1, ...groups.map((group) => group.entrants))
  return (
    <ul className="flip-bars count-bars" aria-label="How many entrants held how many tickets">
      {groups.map((group) => (
        <li key={group.from}>
          <span>
            {group.from === group.to
              ? formatNumber(group.from)
              : `${formatNumber(group.from)}–${formatNumber(group.to)}`}
            <span className="vh"> tickets</span>
          </span>
          <svg aria-hidden="true">
            <rect className="count-bar" y="5" height="18" width={`${((group.entrants / most) * 100).toFixed(2)}%`} />
          </svg>
          <span className="num">
            {formatNumber(group.entrants)}
            <span className="vh"> entrants</span>
          </span>
        </li>
      ))}
    </ul>
  )
}
