import type { AnchorHTMLAttributes, ReactNode } from 'react'
import { Link as RouterLink } from 'react-router'

interface LinkProps extends Omit<AnchorHTMLAttributes<HTMLAnchorElement>, 'href'> {
  readonly to: string
  /** A file or another site: an ordinary request, not a page of ours. */
  readonly plain?: boolean
  /** The page stays where it is scrolled to: for links that only put a list in another order. */
  readonly keepScroll?: boolean
  readonly children: ReactNode
}

/** A link: ink with a grey line. */
export function Link({ to, plain = false, keepScroll = false, children, ...rest }: LinkProps) {
  if (plain || /^[a-z]+:/.test(to)) {
    return (
      <a href={to} {...rest}>
        {children}
      </a>
    )
  }
  return (
    <RouterLink to={to} preventScrollReset={keepScroll} {...rest}>
      {children}
    </RouterLink>
  )
}
