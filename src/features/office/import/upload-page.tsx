import { useQuery, useQueryClient } from '@tanstack/react-query'
import { useNavigate, useParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { DataTable } from '#src/ui/data-table.tsx'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { importQuery, importsQuery } from '../api/queries.ts'
import { useDraw } from '../draw/use-draw.ts'
import { whyFixed } from '../entrants/list-words.ts'
import { drawPath } from '../paths.ts'
import { EarlierImports } from './earlier-imports.tsx'
import { COLUMNS, SAMPLE, SAMPLE_PATH } from './sample.ts'
import { UploadForm } from './upload-form.tsx'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => importsQuery(api, args.params.draw ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const navigate = useNavigate()
  const queryClient = useQueryClient()
  const draw = useDraw()
  const organisation = useParams().organisation ?? ''
  const imports = useQuery(importsQuery(api, draw.id))
  const href = (id: string) => `${drawPath(organisation, draw.id, 'import')}/${id}`
  const why = whyFixed(draw)
  return (
    <>
      <Head title={`Bring in a sheet: ${draw.title}`} description="Entrants from a spreadsheet." />
      <Part
        title="Bring in a sheet"
        note={<Link to={drawPath(organisation, draw.id, 'entrants')}>Back to the entrants</Link>}
      >
        {why ? (
          <p className="measure waits mt-0">{why}</p>
        ) : (
          <UploadForm
            draw={draw.id}
            onDone={async (view) => {
              queryClient.setQueryData(importQuery(api, draw.id, view.id).queryKey, view)
              void queryClient.invalidateQueries({ queryKey: importsQuery(api, draw.id).queryKey, exact: true })
              await navigate(href(view.id))
            }}
          />
        )}
      </Part>
      {why ? null : <Columns />}
      <EarlierImports imports={imports.data ?? []} timeZone={draw.timeZone} href={href} />
    </>
  )
}

function Columns() {
  return (
    <Part title="What the sheet holds" note="One row for each entrant. The first row names the columns.">
      <DataTable
        dense
        className="columns"
        rows={COLUMNS}
        rowKey={(column) => column.name}
        columns={[
          { key: 'name', head: 'Column', rowHead: true, cell: (column) => <span className="mono">{column.name}</span> },
          { key: 'words', head: 'What it says', cell: (column) => column.words },
          { key: 'needed', head: 'Needed', cell: (column) => (column.needed ? 'Yes' : 'No') },
        ]}
      />
      <p className="measure note mt-unit">
        In any order. Commas, semicolons or tabs may stand between cells. Other columns are not read and not stored, and
        the page says which.
      </p>
      <h3 className="mt-unit-3">An example</h3>
      <pre className="command" tabIndex={0} aria-label="The example as text">
        {SAMPLE}
      </pre>
      <p className="mt-unit">
        <Link to={SAMPLE_PATH} plain download="entrants-sample.csv">
          Download the example
        </Link>{' '}
        to fill it in with your spreadsheet.
      </p>
    </Part>
  )
}
