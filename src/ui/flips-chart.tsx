import { countOf, formatNumber } from './format-number.ts'

export interface FlipsRow {
  readonly flips: number
  readonly coins: number
  /** Expected number of coins, as a decimal. */
  readonly expected: string
}

/** How many coins took one flip, two, three …; the upright mark is what theory expects. */
export function FlipsChart({ rows }: { readonly rows: readonly FlipsRow[] }) {
  const most = Math.max(1, ...rows.map((row) => Math.max(row.coins, Number(row.expected)))) * 1.04
  const percent = (value: number) => `${((value / most) * 100).toFixed(2)}%`
  return (
    <ul className="flip-bars" aria-label="How many flips each coin took">
      {rows.map((row) => (
        <li key={row.flips}>
          <span>{countOf(row.flips, 'flip')}</span>
          <svg aria-hidden="true">
            <rect className="count-bar" y="5" height="18" width={percent(row.coins)} />
            <line
              className="theory-edge"
              x1={percent(Number(row.expected))}
              x2={percent(Number(row.expected))}
              y1="0"
              y2="28"
            />
            <line
              className="theory"
              x1={percent(Number(row.expected))}
              x2={percent(Number(row.expected))}
              y1="0"
              y2="28"
            />
          </svg>
          <span className="num">
            {formatNumber(row.coins)}
            <span className="vh">
              {row.coins === 1 ? ' coin' : ' coins'}, {row.expected} expected
            </span>
          </span>
        </li>
      ))}
    </ul>
  )
}
