import { type DragEvent, type ReactNode, useState } from 'react'
import { useHydrated } from '#src/ui/use-hydrated.ts'

interface FileDropProps {
  readonly id: string
  readonly label: string
  readonly hint: ReactNode
  readonly error?: string | undefined
  readonly onFiles: (files: readonly File[]) => void
}

/** A place to drop files on, and the same as a button for everybody who does not drag. */
export function FileDrop({ id, label, hint, error, onFiles }: FileDropProps) {
  const [over, setOver] = useState(false)
  const ready = useHydrated()
  const drop = (event: DragEvent) => {
    event.preventDefault()
    setOver(false)
    onFiles([...event.dataTransfer.files])
  }
  return (
    <div
      className={over ? 'file-drop over' : 'file-drop'}
      onDragOver={(event) => {
        event.preventDefault()
        setOver(true)
      }}
      onDragLeave={() => setOver(false)}
      onDrop={drop}
    >
      <label htmlFor={id}>{label}</label>
      <p className="hint" id={`${id}-hint`}>
        {hint}
      </p>
      {error ? (
        <p className="fault" id={`${id}-error`}>
          <b>Error:</b> {error}
        </p>
      ) : null}
      <input
        type="file"
        id={id}
        aria-describedby={error ? `${id}-hint ${id}-error` : `${id}-hint`}
        aria-invalid={error ? true : undefined}
        multiple
        disabled={!ready}
        onChange={(event) => {
          onFiles([...(event.target.files ?? [])])
          // The same file can be chosen again after it was changed.
          event.target.value = ''
        }}
      />
    </div>
  )
}
