import type { ReactNode } from 'react'
import { type ChanceFigures, fraction, oneIn, oneInChance, perCent } from './chance-words.ts'
import { type Column, DataTable } from './data-table.tsx'
import { countOf, formatNumber } from './format-number.ts'

/** What a number of tickets gives, as the API tells it. */
export interface OddsRow {
  readonly tickets: number
  readonly total: number
  readonly entrants: number
  readonly first: { readonly over: number; readonly under: number }
  readonly prize: ChanceFigures
  readonly pick: ChanceFigures
}

/** What is drawn: items to be won, and reserves behind them. */
export interface OddsOf {
  readonly prizes: number
  readonly reserves: number
}

/** The figures of a chance: exact where it is short, else nine digits; and per cent. */
export function chanceFigures({ decimal, exact }: ChanceFigures): string {
  return `${exact ? fraction(exact.over, exact.under) : decimal}, ${perCent(Number(decimal))}`
}

const firstFigures = ({ first }: OddsRow) =>
  `${fraction(first.over, first.under)}, ${perCent(first.over / first.under)}`

function Chance({ words, figures }: { readonly words: string; readonly figures: string }) {
  return (
    <span>
      {words} <span className="odds-exact">({figures})</span>
    </span>
  )
}

/** Words first, figures second, a row for each number of tickets. */
export function OddsTable({
  rows,
  of,
  head,
  held = false,
}: {
  readonly rows: readonly OddsRow[]
  readonly of: OddsOf
  readonly head: string
  /** Whether to say how many entrants hold as many. */
  readonly held?: boolean
}) {
  const columns: Column<OddsRow>[] = [
    { key: 'tickets', head, rowHead: true, cell: (row) => countOf(row.tickets, 'ticket') },
    ...(held
      ? [
          {
            key: 'entrants',
            head: 'Entrants with as many',
            numeric: true,
            cell: (row: OddsRow) => formatNumber(row.entrants),
          },
        ]
      : []),
    {
      key: 'first',
      head: of.prizes === 1 ? 'The prize' : 'First prize',
      numeric: true,
      cell: (row) => <Chance words={oneIn(row.first.over, row.first.under)} figures={firstFigures(row)} />,
    },
  ]
  if (of.prizes > 1) {
    columns.push({
      key: 'prize',
      head: `Any of the ${formatNumber(of.prizes)} prizes`,
      numeric: true,
      cell: (row) => <Chance words={oneInChance(row.prize)} figures={chanceFigures(row.prize)} />,
    })
  }
  if (of.reserves > 0) {
    columns.push({
      key: 'pick',
      head: 'A prize, or a reserve’s place',
      numeric: true,
      cell: (row) => <Chance words={oneInChance(row.pick)} figures={chanceFigures(row.pick)} />,
    })
  }
  return <DataTable className="odds-table" rows={rows} rowKey={(row) => String(row.tickets)} columns={columns} />
}

/** The chance of at least one prize as a bar for each number of tickets, all to one scale. */
export function OddsChart({ rows, of }: { readonly rows: readonly OddsRow[]; readonly of: OddsOf }) {
  const most = Math.max(...rows.map((row) => Number(row.prize.decimal)))
  const label = of.prizes === 1 ? 'Chance of the prize' : 'Chance of at least one prize'
  return (
    <figure className="odds-chart">
      <figcaption>{label}, by tickets held</figcaption>
      <ul className="flip-bars" aria-label={`${label}, by tickets held`}>
        {rows.map((row) => (
          <li key={row.tickets}>
            <span>
              {formatNumber(row.tickets)}
              <span className="vh"> {row.tickets === 1 ? 'ticket' : 'tickets'}</span>
            </span>
            <svg aria-hidden="true">
              <rect
                className="count-bar"
                y="5"
                height="18"
                width={`${((Number(row.prize.decimal) / most) * 100).toFixed(2)}%`}
              />
            </svg>
            <span className="num">{perCent(Number(row.prize.decimal))}</span>
          </li>
        ))}
      </ul>
    </figure>
  )
}

/** The odds of one number of tickets in sentences; `nobody` says what they mean where nobody holds as many. */
export function OddsAnswer({
  row,
  of,
  nobody,
}: {
  readonly row: OddsRow
  readonly of: OddsOf
  readonly nobody: ReactNode
}) {
  return (
    <>
      <p>
        <b>
          {countOf(row.tickets, 'ticket')} of the {formatNumber(row.total)} in.
        </b>{' '}
        {of.prizes === 1 ? 'The prize' : 'The first prize'}: {oneIn(row.first.over, row.first.under)} (
        {firstFigures(row)}).
        {of.prizes > 1
          ? ` At least one of the ${formatNumber(of.prizes)} prizes: ${oneInChance(row.prize)} (${chanceFigures(row.prize)}).`
          : ''}
        {of.reserves > 0
          ? ` A prize or a place among the ${countOf(of.reserves, 'reserve')}: ${oneInChance(row.pick)} (${chanceFigures(row.pick)}).`
          : ''}
      </p>
      {row.entrants === 0 ? <p className="note">{nobody}</p> : null}
    </>
  )
}
