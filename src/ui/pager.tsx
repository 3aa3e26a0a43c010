import { formatNumber } from './format-number.ts'
import { Link } from './link.tsx'

interface PagerProps {
  readonly page: number
  readonly pageSize: number
  readonly total: number
  /** The address of a page, counted from 1. */
  readonly href: (page: number) => string
  /** Plural of what is listed: "draws". */
  readonly noun: string
}

/** Where one is in a long list, and the ways on. Nothing where all fits on one page. */
export function Pager({ page, pageSize, total, href, noun }: PagerProps) {
  const pages = Math.max(1, Math.ceil(total / pageSize))
  if (pages === 1 && page === 1) return null
  const first = Math.min(total, (page - 1) * pageSize + 1)
  const last = Math.min(total, page * pageSize)
  return (
    <nav className="pager" aria-label={`Pages of ${noun}`}>
      <span>
        {first <= last
          ? `${capital(noun)} ${formatNumber(first)} to ${formatNumber(last)} of ${formatNumber(total)}.`
          : `There is no page ${formatNumber(page)}.`}
      </span>
      {page > 1 ? (
        <Link to={href(Math.min(page - 1, pages))} rel="prev">
          Previous page
        </Link>
      ) : null}
      {page < pages ? (
        <Link to={href(page + 1)} rel="next">
          Next page
        </Link>
      ) : null}
    </nav>
  )
}

const capital = (text: string) => text.charAt(0).toUpperCase() + text.slice(1)
