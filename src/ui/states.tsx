import type { ReactNode } from 'react'
import { Button } from './button.tsx'
import { Notice } from './notice.tsx'

/** Grey lines where text will stand. Says that it loads, once. */
export function Skeleton({ lines = 3, label = 'Loading' }: { readonly lines?: number; readonly label?: string }) {
  return (
    <div role="status">
      <span className="vh">{label}</span>
      {Array.from({ length: lines }, (_, line) => (
        <div className="skeleton" key={line} aria-hidden="true" />
      ))}
    </div>
  )
}

/** Nothing here, and what to do about it. */
export function Empty({ title, children }: { readonly title: string; readonly children?: ReactNode }) {
  return (
    <div className="measure">
      <p>
        <b>{title}</b>
      </p>
      {children}
    </div>
  )
}

interface FailureProps {
  readonly title: string
  readonly detail: string
  readonly onRetry?: () => void
}

export function Failure({ title, detail, onRetry }: FailureProps) {
  return (
    <Notice title={title} fault>
      <p>{detail}</p>
      {onRetry ? (
        <p>
          <Button small quiet onClick={onRetry}>
            Try again
          </Button>
        </p>
      ) : null}
    </Notice>
  )
}
