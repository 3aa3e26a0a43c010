import type { ButtonHTMLAttributes, ReactNode } from 'react'
import { Link } from './link.tsx'
import { useHydrated } from './use-hydrated.ts'

interface Look {
  readonly quiet?: boolean
  readonly small?: boolean
  /** For what cannot be undone; always with words that say so. */
  readonly danger?: boolean
}

const classes = ({ quiet, small, danger }: Look) =>
  ['button', quiet && 'quiet', small && 'small', danger && 'danger'].filter(Boolean).join(' ')

interface ButtonProps extends ButtonHTMLAttributes<HTMLButtonElement>, Look {
  /** Set while the action runs: the button stays focusable, says so, and ignores further clicks. */
  readonly busy?: boolean
  /** Its form works without JavaScript, as a search does. Other forms wait until the page's code is there. */
  readonly native?: boolean
}

export function Button({
  quiet,
  small,
  danger,
  busy = false,
  native = false,
  type = 'button',
  onClick,
  children,
  ...rest
}: ButtonProps) {
  const waking = !useHydrated() && type === 'submit' && !native
  return (
    <button
      {...rest}
      type={type}
      className={`${classes({ quiet, small, danger })}${waking ? ' waking' : ''}`}
      disabled={waking || rest.disabled}
      aria-disabled={busy || rest['aria-disabled'] ? true : undefined}
      aria-busy={busy ? true : undefined}
      onClick={(event) => {
        if (busy) event.preventDefault()
        else onClick?.(event)
      }}
    >
      {children}
    </button>
  )
}

interface ButtonLinkProps extends Look {
  readonly to: string
  readonly plain?: boolean
  readonly download?: boolean
  readonly children: ReactNode
}

/** A link that looks like a button: going somewhere, or fetching a file. */
export function ButtonLink({ quiet, small, danger, children, ...rest }: ButtonLinkProps) {
  return (
    <Link {...rest} className={classes({ quiet, small, danger })}>
      {children}
    </Link>
  )
}

/** A small action inside a line of text. */
export function TextButton({ type = 'button', ...rest }: ButtonHTMLAttributes<HTMLButtonElement>) {
  return <button {...rest} type={type} className="text-button" />
}
