import type { ReactNode } from 'react'

interface NoticeProps {
  readonly title?: string
  /** Level of the title: 2 outside a part. */
  readonly level?: 2 | 3
  /** Only for errors; waiting and warnings are plain. */
  readonly fault?: boolean
  readonly children?: ReactNode
}

/** Words that have to be seen, between two rules of ink. */
export function Notice({ title, level = 3, fault = false, children }: NoticeProps) {
  const Heading = level === 2 ? 'h2' : 'h3'
  return (
    <div className={fault ? 'notice fault' : 'notice'}>
      {title ? <Heading>{title}</Heading> : null}
      {children}
    </div>
  )
}
