import { useEffect, useRef, useState } from 'react'
import { uploadImport, type ImportView } from '#shared/schemas/api/office.ts'
import { STOPPED, uploadFile, type Upload } from '#src/lib/upload-file.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { Field } from '#src/ui/field.tsx'
import { formatBytes } from '#src/ui/format-number.ts'
import { fileProblem } from './file-checks.ts'

interface Sending {
  readonly sent: number
  readonly total: number
}

interface UploadFormProps {
  readonly draw: string
  readonly onDone: (view: ImportView) => void
}

/** Choosing or dropping a file, and sending it with its progress in sight. The chosen file stays until it is there. */
export function UploadForm({ draw, onDone }: UploadFormProps) {
  const [file, setFile] = useState<File | null>(null)
  const [over, setOver] = useState(false)
  const [fault, setFault] = useState<string | null>(null)
  const [failure, setFailure] = useState<string | null>(null)
  const [stopped, setStopped] = useState(false)
  const [sending, setSending] = useState<Sending | null>(null)
  const upload = useRef<Upload<typeof uploadImport> | null>(null)
  const input = useRef<HTMLInputElement>(null)
  useEffect(() => () => upload.current?.stop(), [])

  const choose = (chosen: File | undefined) => {
    if (!chosen || sending) return
    setFile(chosen)
    setFailure(null)
    setFault(fileProblem(chosen))
  }
  const send = async () => {
    // A file may have been chosen before the page's code was there to hear of it.
    const chosen = file ?? input.current?.files?.[0] ?? null
    const problem = chosen ? fileProblem(chosen) : 'Choose a CSV file.'
    if (!chosen || problem) {
      setFault(problem)
      input.current?.focus()
      return
    }
    setFailure(null)
    setStopped(false)
    setSending({ sent: 0, total: chosen.size })
    const started = uploadFile(uploadImport, { params: { draw } }, chosen, (sent, total) => setSending({ sent, total }))
    upload.current = started
    try {
      onDone(await started.answer)
    } catch (error) {
      const details = detailsOf(error as Error)
      const atField = details.errors?.find(({ field }) => field === 'file')
      setStopped(details.status === STOPPED)
      setFailure(details.status === STOPPED ? null : (atField?.message ?? details.detail))
    } finally {
      upload.current = null
      setSending(null)
    }
  }

  return (
    <form
      className="form"
      method="post"
      noValidate
      onSubmit={(event) => {
        event.preventDefault()
        void send()
      }}
    >
      {failure ? <ErrorSummary title="The file did not arrive" detail={failure} /> : null}
      {sending && file ? (
        <Progress file={file} sending={sending} onStop={() => upload.current?.stop()} />
      ) : (
        <>
          <div
            className={over ? 'drop over' : 'drop'}
            onDragOver={(event) => {
              event.preventDefault()
              setOver(true)
            }}
            onDragLeave={() => setOver(false)}
            onDrop={(event) => {
              event.preventDefault()
              setOver(false)
              choose(event.dataTransfer.files[0])
            }}
          >
            <Field
              name="file"
              label="Sheet of entrants"
              hint="CSV, at most 200 MB. Choose it, or drop it here."
              error={fault ?? undefined}
            >
              {(aria) => (
                <input
                  {...aria}
                  ref={input}
                  type="file"
                  name="file"
                  className="file-input"
                  accept=".csv,.tsv,.txt,text/csv,text/plain"
                  onChange={(event) => choose(event.currentTarget.files?.[0])}
                />
              )}
            </Field>
            {file ? (
              <p className="mt-unit">
                Chosen: <b>{file.name}</b>, {formatBytes(file.size)}.
              </p>
            ) : null}
          </div>
          <p className="buttons">
            <Button type="submit">{failure ? 'Upload it again' : 'Upload it, and look through it'}</Button>
            <span className="note" role="status">
              {stopped
                ? 'You stopped the upload. Nothing was stored.'
                : 'Nothing joins the list before you have seen what is in it.'}
            </span>
          </p>
        </>
      )}
    </form>
  )
}

interface ProgressProps {
  readonly file: File
  readonly sending: Sending
  readonly onStop: () => void
}

function Progress({ file, sending: { sent, total }, onStop }: ProgressProps) {
  const there = total > 0 && sent >= total
  const quarters = total > 0 ? Math.floor((sent / total) * 4) * 25 : 0
  return (
    <div>
      <p id="upload-words">
        <b>{file.name}</b>:{' '}
        {there
          ? 'the file is there. The site reads its rows.'
          : `${formatBytes(sent)} of ${formatBytes(total)} sent. Keep this page open.`}
      </p>
      <progress className="progress mt-unit" aria-labelledby="upload-words" value={sent} max={total || 1} />
      <p className="mt-unit-2">
        <Button quiet onClick={onStop}>
          Stop
        </Button>
      </p>
      <Announcer words={there ? 'The file is there. The site reads its rows.' : `${quarters} per cent sent.`} />
    </div>
  )
}
