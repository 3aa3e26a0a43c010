import type { ReactNode } from 'react'
import type { EntrantRow } from '#shared/schemas/api/office.ts'
import { TextButton } from '#src/ui/button.tsx'
import { DataTable, type Column } from '#src/ui/data-table.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { nextOrder, type EntrantListSearch, type SortColumn } from './search.ts'

interface EntrantTableProps {
  readonly rows: readonly EntrantRow[]
  readonly total: number
  readonly tickets: number
  readonly search: EntrantListSearch
  readonly href: (search: Partial<EntrantListSearch>) => string
  readonly mayChange: boolean
  /** The row whose panel is open. */
  readonly open: string | null
  readonly onToggle: (row: EntrantRow) => void
  readonly panel: (row: EntrantRow) => ReactNode
}

/** The id of the button that opens a row's panel: focus goes back to it. */
export const rowButtonId = (entrant: string) => `entrant-${entrant}`

/** Entrants as a table with sortable heads; on phones, rows of two lines. */
export function EntrantTable(props: EntrantTableProps) {
  const { rows, total, tickets, search, href, mayChange, open, onToggle, panel } = props
  const sortable = (key: SortColumn, title: string): Pick<Column<EntrantRow>, 'key' | 'head' | 'label' | 'sorted'> => ({
    key,
    label: title,
    head: <SortLink title={title} column={key} search={search} href={href} />,
    sorted: search.sort === key ? (search.direction === 'up' ? 'ascending' : 'descending') : undefined,
  })
  return (
    <DataTable
      dense
      className="entrants"
      rows={rows}
      rowKey={(row) => row.id}
      detail={(row) => (row.id === open ? panel(row) : null)}
      columns={[
        { ...sortable('name', 'Name'), rowHead: true, cell: (row) => row.name },
        { ...sortable('label', 'Announced as'), cell: (row) => row.label },
        {
          key: 'contact',
          head: 'E-mail or telephone',
          cell: (row) => row.email ?? row.phone ?? <span className="none">none</span>,
        },
        { key: 'numbers', head: 'Ticket numbers', cell: (row) => <span className="clamp">{row.numbers ?? ''}</span> },
        { ...sortable('code', 'Code'), cell: (row) => <span className="mono">{row.code}</span> },
        { ...sortable('tickets', 'Tickets'), numeric: true, cell: (row) => formatNumber(row.tickets) },
        {
          key: 'open',
          head: <span className="vh">Open</span>,
          cell: (row) => (
            <TextButton
              id={rowButtonId(row.id)}
              aria-expanded={row.id === open}
              aria-label={`${mayChange ? 'Change' : 'Show'} ${row.name}`}
              onClick={() => onToggle(row)}
            >
              {mayChange ? 'Change' : 'Show'}
            </TextButton>
          ),
        },
      ]}
      foot={
        <tfoot role="rowgroup">
          <tr role="row">
            <th scope="row" role="rowheader" colSpan={5}>
              {countOf(total, 'entrant')}
              {search.q ? ' found' : ''}
            </th>
            <td role="cell" className="num">
              {formatNumber(tickets)}
              <span className="vh"> tickets</span>
            </td>
            <td role="cell" />
          </tr>
        </tfoot>
      }
    />
  )
}

interface SortLinkProps {
  readonly title: string
  readonly column: SortColumn
  readonly search: EntrantListSearch
  readonly href: EntrantTableProps['href']
}

function SortLink({ title, column, search, href }: SortLinkProps) {
  const inUse = search.sort === column
  const next = nextOrder(search, column)
  return (
    <Link className="sort" to={href({ q: search.q, ...next })} keepScroll>
      {title}
      <span aria-hidden="true">{inUse ? (search.direction === 'up' ? ' ↑' : ' ↓') : ''}</span>
      <span className="vh">{next.direction === 'up' ? ', sort upwards' : ', sort downwards'}</span>
    </Link>
  )
}
