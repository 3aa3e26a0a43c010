import type { ReactNode } from 'react'
import { NavLink, useLocation } from 'react-router'
import { Mark, Wordmark } from './brand.tsx'
import { useFocusWhenLost } from './use-focus-when-lost.ts'

export interface MenuItem {
  readonly to: string
  readonly text: string
  /** Only this very address marks the item as current. */
  readonly end?: boolean
}

interface PageProps {
  readonly menu: readonly MenuItem[]
  /** Stands at the far end of the menu: who is signed in, signing in. */
  readonly apart?: ReactNode
  /** Words above the sheet, for the whole site: a demo, a development chain. */
  readonly banner?: ReactNode
  readonly footer: ReactNode
  readonly className?: string
  readonly children: ReactNode
}

/** The sheet: skip link, masthead, main, footer. The menu stands in the footer too, where phones reach it by a link. */
export function Page({ menu, apart, banner, footer, className, children }: PageProps) {
  useFocusWhenLost(useLocation().pathname)
  return (
    <div className={`page${className ? ` ${className}` : ''}`}>
      <a className="skip" href="#main">
        Skip to the content
      </a>
      <header className="row masthead">
        <div className="stub">
          <NavLink to="/" className="home" aria-label="Evenpenny, home" end>
            <Wordmark />
          </NavLink>
          <a className="menu-link" href="#site-menu">
            Menu
          </a>
        </div>
        <div className="body">
          <nav aria-label="Site">
            <ul className="menu">
              <MenuItems items={menu} />
              {apart ? <li className="apart">{apart}</li> : null}
            </ul>
          </nav>
        </div>
      </header>
      {banner}
      <main id="main" tabIndex={-1}>
        {children}
      </main>
      <footer className="row footer">
        <div className="stub">
          <Mark />
        </div>
        <div className="body">
          <nav aria-label="Site, again" id="site-menu">
            <ul className="footer-menu">
              <MenuItems items={menu} />
              {apart ? <li>{apart}</li> : null}
            </ul>
          </nav>
          {footer}
        </div>
      </footer>
    </div>
  )
}

function MenuItems({ items }: { readonly items: readonly MenuItem[] }) {
  return items.map((item) => (
    <li key={item.to}>
      <NavLink to={item.to} end={item.end ?? false}>
        {item.text}
      </NavLink>
    </li>
  ))
}

interface TitleProps {
  /** The counterfoil beside the title: state, dates. */
  readonly stub?: ReactNode
  readonly stubClass?: string
  /** A line above the title, such as the organisation. */
  readonly above?: ReactNode
  readonly title: string
  /** The largest size: a draw's own title. Long titles take a smaller one. */
  readonly broad?: boolean
  readonly lead?: ReactNode
  readonly children?: ReactNode
}

/** The head of a page: its only h1. */
export function Title({ stub, stubClass, above, title, broad = false, lead, children }: TitleProps) {
  const size = broad ? `broad${title.length > 22 ? ' long' : ''}` : undefined
  return (
    <div className="row title">
      <div className={`stub${stubClass ? ` ${stubClass}` : ''}`}>{stub}</div>
      <div className="body">
        {above ? <p className="above">{above}</p> : null}
        <h1 className={size}>{title}</h1>
        {lead ? <p className="lead">{lead}</p> : null}
        {children}
      </div>
    </div>
  )
}

interface PartProps {
  readonly title: string
  /** A few words under the heading, on the counterfoil. */
  readonly note?: ReactNode
  readonly id?: string
  readonly className?: string
  readonly children: ReactNode
}

/** One part of a page: heading on the counterfoil, matter in the body. */
export function Part({ title, note, id, className, children }: PartProps) {
  return (
    <section className={`row part${className ? ` ${className}` : ''}`} id={id}>
      <div className="stub">
        <h2>{title}</h2>
        {note ? <div className="stub-facts">{note}</div> : null}
      </div>
      <div className="body">{children}</div>
    </section>
  )
}

/** Names and values, as a list that reads aloud in pairs. */
export function Facts({
  items,
  exact = false,
}: {
  readonly items: readonly (readonly [string, ReactNode] | null)[]
  readonly exact?: boolean
}) {
  return (
    <dl className={exact ? 'facts exact' : 'facts'}>
      {items.flatMap((item) =>
        item === null ? [] : [<dt key={`${item[0]} name`}>{item[0]}</dt>, <dd key={item[0]}>{item[1]}</dd>],
      )}
    </dl>
  )
}
