import { useSuspenseQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import { BEYOND_ANY_CHECK } from '#shared/protocol/check/verdict.ts'
import { CheckPanel } from '#src/features/check/components/check-panel.tsx'
import { siteWorker } from '#src/features/check/site-worker.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { CopyButton } from '#src/ui/copy-button.tsx'
import { Digest } from '#src/ui/digest.tsx'
import { formatBytes } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { drawQuery } from './api/get-draw.ts'
import { checkCommand } from './check-command.ts'
import { drawFiles } from './draw-files.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => drawQuery(api, args.params.slug ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const { slug = '' } = useParams()
  const { data } = useSuspenseQuery(drawQuery(api, slug))
  return <Check draw={data} />
}

/** How to check a draw with tools of one's own. */
export function Check({ draw }: { readonly draw: DrawPage }) {
  const { seal, result } = draw
  return (
    <>
      <Head
        title={`Check it: ${draw.title}`}
        description={`How to check ${draw.title} by ${draw.organisation.name} on your own computer, and the files to do it with.`}
        path={`/draws/${draw.slug}/check`}
      />
      <Title
        title="Check every coin yourself"
        lead="You need no trust in this site: the files below hold all that the draw was made of, and a check that runs without us."
        stub={
          <p className="stub-facts mt-0">
            <Link to={`/draws/${draw.slug}`}>{draw.title}</Link>
            <br />
            {draw.organisation.name}
          </p>
        }
      />
      {seal && result ? (
        <>
          <CheckPanel
            createWorker={siteWorker}
            archive={result.archive ? { url: `/draws/${draw.slug}/proof.zip`, bytes: result.archive.bytes } : null}
            publishedKey={seal.keyFingerprint}
            demo={draw.demo}
            watchesLog
          />
          <ByCommand draw={draw} seal={seal} />
        </>
      ) : (
        <NothingYet draw={draw} />
      )}
      <WithoutUs />
      <Files draw={draw} />
      <Part title="What no check can show">
        <ul className="dashes measure">
          {BEYOND_ANY_CHECK.map((sentence) => (
            <li key={sentence}>{sentence}</li>
          ))}
          <li>
            That the list was sealed in time, by the arithmetic alone: for that somebody other than this site must have
            seen the seal before the draw.
          </li>
        </ul>
      </Part>
    </>
  )
}

function ByCommand({ draw, seal }: { readonly draw: DrawPage; readonly seal: NonNullable<DrawPage['seal']> }) {
  const command = checkCommand(seal)
  const archive = draw.result?.archive
  return (
    <Part title="By one command" note={<p>Node.js 20 or later, nothing else</p>}>
      <p className="measure">
        Download the archive, unpack it and run the check that lies in it. It prints each step and what it found, and
        names the first thing that fails.
      </p>
      <code className="command" tabIndex={0}>
        {command}
      </code>
      <p className="mt-unit">
        <CopyButton value={command} what="the command" text="Copy the command" />
      </p>
      {seal.beacon?.network === 'development' ? (
        <p className="note measure">
          This draw was made with the development chain, so the check needs <code>--test-beacon</code> and says so in
          its verdict.
        </p>
      ) : null}
      <p className="buttons mt-unit-2">
        {archive ? (
          <ButtonLink plain download to={`/draws/${draw.slug}/proof.zip`}>
            Download the archive, {formatBytes(archive.bytes)}
          </ButtonLink>
        ) : (
          <span className="note">The archive is being put together. Load this page again in a minute.</span>
        )}
      </p>
      <div className="note mt-unit-2">
        <Digest
          label="The key’s fingerprint, which also stands on posters and tickets:"
          value={seal.keyFingerprint}
          what="the key’s fingerprint"
        />
        {archive ? (
          <Digest label="SHA-256 of the archive as stored:" value={archive.sha256} what="the archive’s digest" />
        ) : null}
      </div>
    </Part>
  )
}

function NothingYet({ draw }: { readonly draw: DrawPage }) {
  return (
    <Part title="Not yet">
      <p className="measure">
        {draw.seal
          ? 'The list is sealed but nothing is drawn, so there are no coins to check. The seal’s own files are here already: keep a copy, and compare it after the draw.'
          : 'This draw is not sealed, so there is nothing to check yet.'}
      </p>
    </Part>
  )
}

/** The same check as one file, for whoever would rather not run code that this site sends at the time. */
function WithoutUs() {
  return (
    <Part title="Without this site" note={<p>One file, with everything in it</p>}>
      <p className="measure">
        The check also comes as a single page. Save it once, keep it, and open it from your own disk with the network
        off: it takes an archive, and receipts with it, and does every step. It can send nothing anywhere, because it
        forbids itself all connections.
      </p>
      <p className="buttons mt-unit">
        <ButtonLink plain download quiet to="/check.html">
          Save the page
        </ButtonLink>
        <Link plain to="/check.html">
          Open it here
        </Link>
      </p>
    </Part>
  )
}

function Files({ draw }: { readonly draw: DrawPage }) {
  const files = drawFiles(draw)
  if (files.length === 0) return null
  return (
    <Part title="The files">
      <ul className="figures files">
        {files.map((file) => (
          <li key={file.name}>
            <Link plain to={`/draws/${draw.slug}/${file.name}`} className="mono">
              {file.name}
            </Link>
            <span>{file.what}</span>
          </li>
        ))}
      </ul>
    </Part>
  )
}
