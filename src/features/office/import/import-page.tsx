import { useQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import type { ImportView } from '#shared/schemas/api/office.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { formatBytes, formatNumber } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { Failure, Skeleton } from '#src/ui/states.tsx'
import { Time } from '#src/ui/time.tsx'
import { useFocusWhenLost } from '#src/ui/use-focus-when-lost.ts'
import { importQuery, importsQuery } from '../api/queries.ts'
import { useDraw } from '../draw/use-draw.ts'
import { drawPath } from '../paths.ts'
import { ImportDecision } from './import-decision.tsx'
import { ImportPreview } from './import-preview.tsx'
import { ImportProblems } from './import-problems.tsx'
import { importWords, readShare } from './import-words.ts'

export async function loader(args: LoaderFunctionArgs) {
  const { draw = '', import: id = '' } = args.params
  await Promise.all([load(args, (api) => importQuery(api, draw, id)), load(args, (api) => importsQuery(api, draw))])
  return null
}

const TITLES: Record<ImportView['state'], string> = {
  reading: 'Being read',
  ready: 'Ready to bring in',
  faulty: 'To be put right',
  applying: 'Being brought in',
  applied: 'In the list',
  discarded: 'Thrown away',
  failed: 'Not read',
}

export function Component() {
  const { api } = useApp()
  const draw = useDraw()
  const { organisation = '', import: id = '' } = useParams()
  const { data: view, error, refetch } = useQuery(importQuery(api, draw.id, id))
  useFocusWhenLost(`${id} ${view?.state}`)
  if (!view) {
    return (
      <Part title="File">
        {error ? (
          <Failure title="It could not be read" detail={detailsOf(error).detail} onRetry={() => void refetch()} />
        ) : (
          <Skeleton label="Reading what was found" />
        )}
      </Part>
    )
  }
  return (
    <>
      <Head title={`${TITLES[view.state]}: ${view.fileName}`} description="A file of entrants." />
      <Part title={TITLES[view.state]} note={<FileNote view={view} timeZone={draw.timeZone} />}>
        <p className="lead" role="status">
          {importWords(view)}
        </p>
        {error ? (
          <div className="mt-unit-2">
            <Failure
              title="How far it is cannot be seen just now"
              detail={detailsOf(error).detail}
              onRetry={() => void refetch()}
            />
          </div>
        ) : null}
        <div className="mt-unit-2">
          <NextStep
            view={view}
            entrants={drawPath(organisation, draw.id, 'entrants')}
            upload={drawPath(organisation, draw.id, 'import')}
          />
        </div>
        <Ignored view={view} />
      </Part>
      {view.state === 'faulty' ? <ImportProblems view={view} /> : null}
      <ImportPreview view={view} />
    </>
  )
}

function FileNote({ view, timeZone }: { readonly view: ImportView; readonly timeZone: string }) {
  return (
    <>
      <b>{view.fileName}</b>
      <br />
      <Time at={view.createdAt} timeZone={timeZone} as="brief" />
      {view.createdBy ? `, ${view.createdBy}` : ''}
    </>
  )
}

interface NextStepProps {
  readonly view: ImportView
  readonly entrants: string
  readonly upload: string
}

function NextStep({ view, entrants, upload }: NextStepProps) {
  switch (view.state) {
    case 'reading':
      return <Reading view={view} />
    case 'applying':
      return <p>You can leave this page: it goes on without it.</p>
    case 'ready':
      return <ImportDecision view={view} />
    case 'faulty':
      return (
        <>
          <p className="measure">
            Put the rows below right in your spreadsheet, save it again as &ldquo;CSV UTF-8&rdquo; and{' '}
            <Link to={upload}>bring in the new one</Link>. A file joins the list whole or not at all.
          </p>
          <ImportDecision view={view} />
        </>
      )
    case 'applied':
      return (
        <p className="buttons">
          <ButtonLink to={entrants}>See the list</ButtonLink>
          <Link to={upload}>Bring in another sheet</Link>
        </p>
      )
    case 'discarded':
    case 'failed':
      return (
        <p className="buttons">
          <ButtonLink to={upload}>{view.state === 'failed' ? 'Upload it again' : 'Bring in another sheet'}</ButtonLink>
          <Link to={entrants}>Back to the entrants</Link>
        </p>
      )
  }
}

function Reading({ view }: { readonly view: ImportView }) {
  const share = readShare(view)
  return (
    <>
      <p id="reading-words">
        {share === null
          ? `${formatBytes(view.bytesRead)} read.`
          : `${formatBytes(view.bytesRead)} of ${formatBytes(view.bytesTotal)} read.`}{' '}
        {view.rows > 0 ? `${formatNumber(view.rows)} rows so far.` : ''}
      </p>
      <progress
        className="progress mt-unit"
        aria-labelledby="reading-words"
        {...(share === null ? {} : { value: share })}
      />
    </>
  )
}

function Ignored({ view }: { readonly view: ImportView }) {
  if (view.ignoredColumns.length === 0) return null
  return (
    <p className="measure note mt-unit-2">
      {view.ignoredColumns.length === 1
        ? 'One column is not read and not stored: '
        : 'These columns are not read and not stored: '}
      {view.ignoredColumns.join(', ')}.
    </p>
  )
}
