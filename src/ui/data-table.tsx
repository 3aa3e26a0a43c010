import { Fragment, type ReactNode } from 'react'

export interface Column<Row> {
  readonly key: string
  readonly head: ReactNode
  /** The head as text, for each cell on phones; left out where `head` is text. */
  readonly label?: string
  readonly numeric?: boolean
  /** The cell that names the row. */
  readonly rowHead?: boolean
  readonly cell: (row: Row) => ReactNode
  /** For sortable tables. */
  readonly sorted?: 'ascending' | 'descending' | undefined
}

interface DataTableProps<Row> {
  readonly caption?: ReactNode
  readonly columns: readonly Column<Row>[]
  readonly rows: readonly Row[]
  readonly rowKey: (row: Row) => string
  readonly dense?: boolean
  readonly className?: string
  /** What opens under a row, over its whole width; null where nothing does. */
  readonly detail?: (row: Row) => ReactNode
  readonly foot?: ReactNode
}

/**
 * A table that becomes rows of two lines on phones. Roles are written out because a table laid out as blocks loses
 * them in some browsers.
 */
export function DataTable<Row>({
  caption,
  columns,
  rows,
  rowKey,
  dense = false,
  className,
  detail,
  foot,
}: DataTableProps<Row>) {
  return (
    <table className={`table stacking${dense ? ' dense' : ''}${className ? ` ${className}` : ''}`} role="table">
      {caption ? <caption>{caption}</caption> : null}
      <thead role="rowgroup">
        <tr role="row">
          {columns.map((column) => (
            <th
              key={column.key}
              scope="col"
              role="columnheader"
              className={column.numeric ? 'num' : undefined}
              aria-sort={column.sorted}
            >
              {column.head}
            </th>
          ))}
        </tr>
      </thead>
      <tbody role="rowgroup">
        {rows.map((row) => (
          <Fragment key={rowKey(row)}>
            <tr role="row">
              {columns.map((column) => (
                <Cell key={column.key} column={column} row={row} />
              ))}
            </tr>
            <Detail span={columns.length}>{detail?.(row)}</Detail>
          </Fragment>
        ))}
      </tbody>
      {foot}
    </table>
  )
}

function Detail({ span, children }: { readonly span: number; readonly children: ReactNode }) {
  if (!children) return null
  return (
    <tr role="row" className="detail">
      <td role="cell" colSpan={span}>
        {children}
      </td>
    </tr>
  )
}

function Cell<Row>({ column, row }: { readonly column: Column<Row>; readonly row: Row }) {
  if (column.rowHead) {
    return (
      <th scope="row" role="rowheader">
        {column.cell(row)}
      </th>
    )
  }
  const label = column.label ?? (typeof column.head === 'string' ? column.head : undefined)
  return (
    <td role="cell" className={column.numeric ? 'num' : undefined} data-label={label}>
      {column.cell(row)}
    </td>
  )
}
