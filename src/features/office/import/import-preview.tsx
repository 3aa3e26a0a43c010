import type { ImportView } from '#shared/schemas/api/office.ts'
import { DataTable } from '#src/ui/data-table.tsx'
import { formatNumber } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'

/** The first rows as they would stand in the list. */
export function ImportPreview({ view }: { readonly view: ImportView }) {
  const { preview, entrants } = view
  if (preview.length === 0) return null
  return (
    <Part
      title="First rows"
      note={
        preview.length < entrants
          ? `${formatNumber(preview.length)} of ${formatNumber(entrants)}, as they will stand in the list`
          : 'As they will stand in the list'
      }
    >
      <DataTable
        dense
        className="entrants preview"
        rows={preview}
        rowKey={(row) => String(row.row)}
        columns={[
          { key: 'name', head: 'Name', rowHead: true, cell: (row) => row.name },
          { key: 'label', head: 'Announced as', cell: (row) => row.label },
          { key: 'email', head: 'E-mail', cell: (row) => row.email ?? '' },
          { key: 'phone', head: 'Telephone', cell: (row) => row.phone ?? '' },
          { key: 'numbers', head: 'Ticket numbers', cell: (row) => <span className="clamp">{row.numbers ?? ''}</span> },
          { key: 'tickets', head: 'Tickets', numeric: true, cell: (row) => formatNumber(row.tickets) },
          { key: 'row', head: 'Row', numeric: true, cell: (row) => formatNumber(row.row) },
        ]}
      />
    </Part>
  )
}
