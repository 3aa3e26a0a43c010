import type { ReactNode } from 'react'

interface NoticeProps {
  readonly title?: string
  /** Only for errors; waiting and warnings are plain. */
  readonly fault?: boolean
  readonly children?: ReactNode
}

/** Words that have to be seen, between two rules of ink. */
export function Notice({ title, fault = false, children }: NoticeProps) {
  return (
    <div className={fault ? 'notice fault' : 'notice'}>
      {title ? <h3>{title}</h3> : null}
      {children}
    </div>
  )
}
