import { type FormEvent, Fragment, useState } from 'react'
import { Announcer } from '#src/ui/announcer.tsx'
import { Button, TextButton } from '#src/ui/button.tsx'
import { TextArea, TextField, TickField } from '#src/ui/field.tsx'
import { formatBytes } from '#src/ui/format-number.ts'
import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import type { WorkerLike } from '../check-run.ts'
import { shareDone } from '../check-state.ts'
import { readFingerprint } from '../fingerprint.ts'
import { rememberedHead } from '../log-memory.ts'
import type { StartOptions } from '../messages.ts'
import { type RefusedFile, sortFiles } from '../sort-files.ts'
import { useCheck } from '../use-check.ts'
import { phaseWords, printable } from '../words.ts'
import { FileDrop } from './file-drop.tsx'
import { LogPart } from './log-part.tsx'
import { PicksPart } from './picks-part.tsx'
import { ReceiptPart } from './receipt-part.tsx'
import { RunningPart } from './running-part.tsx'
import { StepList } from './step-list.tsx'
import { VerdictPart } from './verdict-part.tsx'

export interface CheckPanelProps {
  readonly createWorker: () => WorkerLike
  /** The archive that this page can fetch itself; null where one has to be given. */
  readonly archive: { readonly url: string; readonly bytes: number } | null
  /** The fingerprint that this page publishes; null where it knows none. */
  readonly publishedKey: string | null
  /** Whether a demonstration may be let pass at all. */
  readonly demo: boolean
  /** Whether the site's log is to be asked as well: only on the site itself. */
  readonly watchesLog: boolean
}

/** The check in this browser: what to check, how it goes, what it says. */
export function CheckPanel({ createWorker, archive, publishedKey, demo, watchesLog }: CheckPanelProps) {
  const control = useCheck(createWorker)
  const { view } = control
  const [fingerprint, setFingerprint] = useState(publishedKey ?? '')
  const [allowDevelopment, setAllow] = useState(false)
  const [witnesses, setWitnesses] = useState('')
  const [authorities, setAuthorities] = useState<StartOptions['authorities']>([])
  const [file, setFile] = useState<File | null>(null)
  const [refused, setRefused] = useState<readonly RefusedFile[]>([])
  const [fault, setFault] = useState<string | undefined>()
  const [missing, setMissing] = useState(false)
  const running = view.phase === 'running'
  const given = file
    ? ({ kind: 'file', blob: file } as const)
    : archive
      ? ({ kind: 'address', url: archive.url } as const)
      : null

  async function take(files: readonly File[]) {
    const sorted = await sortFiles(files)
    setRefused(sorted.refused)
    if (sorted.archive) {
      setFile(sorted.archive)
      setMissing(false)
    }
    const given = await Promise.all(
      sorted.certificates.map(async (certificate) => ({ name: certificate.name, pem: await certificate.text() })),
    )
    if (given.length > 0) setAuthorities((before) => [...before, ...given])
    await control.giveReceipts(sorted.receipts)
  }
  function start(event: FormEvent) {
    event.preventDefault()
    if (running) return
    const read = readFingerprint(fingerprint)
    setFault('error' in read ? read.error : undefined)
    setMissing(given === null)
    if ('error' in read || given === null) return
    const log = watchesLog ? { remembered: rememberedHead() } : null
    control.start(given, {
      allowDevelopment,
      authorities,
      witnesses: witnesses.split(/\s+/).filter((key) => key !== ''),
      expectedKey: read.key,
      log,
    })
  }

  return (
    <>
      <Part title="In this browser" note={<p>Nothing leaves this device</p>}>
        <form className="form check-form" onSubmit={start} noValidate>
          <TextField
            name="fingerprint"
            label="The key’s fingerprint"
            hint={
              publishedKey === null
                ? 'All 64 digits, from a poster or a ticket. Without it the check can only say which key signed.'
                : 'This page has filled in the one that it publishes. Better is the one on a poster or a ticket: a page that lies about a draw could lie about its key too.'
            }
            error={fault}
            value={fingerprint}
            onChange={(event) => setFingerprint(event.target.value)}
            autoComplete="off"
            autoCapitalize="none"
            spellCheck={false}
            size="wide"
          />
          {demo ? (
            <TickField
              name="development"
              label="This is a demonstration: let it pass"
              hint="Demonstrations use a beacon and a timestamp authority whose secrets are public, so anybody could choose their outcome. The verdict will say so."
              checked={allowDevelopment}
              onChange={(event) => setAllow(event.target.checked)}
            />
          ) : null}
          <FileDrop
            id="check-files"
            label={archive ? 'Your own files' : 'The archive, and any receipts'}
            hint={
              archive
                ? 'Drop an archive that you have here to check it in place of the download, and receipts or short proofs to hold them against the seal.'
                : 'Drop a proof archive here (proof.zip), and receipts or short proofs to hold them against its seal.'
            }
            error={missing ? 'Choose the archive first.' : undefined}
            onFiles={(files) => void take(files)}
          />
          {file ? (
            <p>
              To be checked: <code>{printable(file.name)}</code>, {formatBytes(file.size)}.{' '}
              <TextButton onClick={() => setFile(null)}>
                {archive ? 'Take the download instead' : 'Remove it'}
              </TextButton>
            </p>
          ) : null}
          {authorities.length > 0 ? (
            <p>
              Trusted for timestamps:{' '}
              {authorities.map(({ name }, index) => (
                <Fragment key={index}>
                  <code>{printable(name)}</code>,{' '}
                </Fragment>
              ))}
              because you gave {authorities.length === 1 ? 'its certificate' : 'their certificates'}.{' '}
              <TextButton onClick={() => setAuthorities([])}>Trust none</TextButton>
            </p>
          ) : null}
          <details className="fold">
            <summary>Who shows that it was sealed in time</summary>
            <div className="form mt-unit">
              <p className="note measure">
                Nobody is trusted for this unless you say so. Give the certificate of a timestamp authority as a file
                above (PEM), and the keys of outside witnesses of the log here, both from a place other than this site.
              </p>
              <TextArea
                name="witnesses"
                label="Keys of witnesses"
                hint="One on a line, written as name, number and key with plus signs between."
                value={witnesses}
                onChange={(event) => setWitnesses(event.target.value)}
                autoComplete="off"
                autoCapitalize="none"
                spellCheck={false}
              />
            </div>
          </details>
          {refused.length > 0 ? (
            <Notice title="Not taken" fault>
              <ul className="dashes">
                {refused.map(({ name, why }) => (
                  <li key={name}>
                    <code>{printable(name)}</code>: {why}
                  </li>
                ))}
              </ul>
            </Notice>
          ) : null}
          <p className="buttons">
            <Button type="submit" busy={running}>
              {archive && !file ? `Check every coin, ${formatBytes(archive.bytes)}` : 'Check every coin'}
            </Button>
            {running ? (
              <Button quiet onClick={control.cancel}>
                Stop
              </Button>
            ) : null}
          </p>
          <noscript>
            <p>The check in the browser needs JavaScript, which is switched off here. The command does the same.</p>
          </noscript>
        </form>
        <Announcer words={phaseWords(view.phase, view.failure?.step ?? null)} />
      </Part>
      {running ? <RunningPart fetched={view.fetched} share={shareDone(view.steps)} steps={view.steps} /> : null}
      <VerdictPart view={view} />
      {view.log ? <LogPart log={view.log} /> : null}
      <ReceiptPart receipts={view.receipts} />
      <Part title={view.phase === 'ready' ? 'What it does' : 'Step by step'} note={<p>Up to the first that fails</p>}>
        <StepList steps={view.steps} failure={view.failure} plain={view.phase === 'ready'} />
      </Part>
      <PicksPart control={control} />
    </>
  )
}
