import { useEffect, useRef } from 'react'

interface ErrorSummaryProps {
  readonly title?: string
  /** What went wrong as a whole, where it is not one field's fault. */
  readonly detail?: string | undefined
  /** Each names the field (its id) and says what to do. */
  readonly errors?: readonly { readonly field: string; readonly message: string }[]
}

/** What has to be put right, with a link to each field. Takes focus when it appears. */
export function ErrorSummary({ title = 'Something needs putting right', detail, errors = [] }: ErrorSummaryProps) {
  const box = useRef<HTMLDivElement>(null)
  useEffect(() => {
    box.current?.focus()
  }, [errors, detail])
  return (
    <div className="notice fault" role="alert" tabIndex={-1} ref={box} aria-labelledby="error-summary-title">
      <h2 id="error-summary-title">{title}</h2>
      {detail ? <p>{detail}</p> : null}
      {errors.length > 0 ? (
        <ul>
          {errors.map((error) => (
            <li key={`${error.field} ${error.message}`}>
              <a href={`#${error.field}`}>{error.message}</a>
            </li>
          ))}
        </ul>
      ) : null}
    </div>
  )
}
