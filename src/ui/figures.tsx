import type { ReactNode } from 'react'

export interface Figure {
  readonly figure: string
  readonly words: ReactNode
}

/** Figures in large type, each with the words that say what it counts. */
export function Figures({ items }: { readonly items: readonly Figure[] }) {
  return (
    <ul className="figures">
      {items.map((item, index) => (
        <li key={index}>
          <span className={item.figure.length > 7 ? 'figure long' : 'figure'}>{item.figure}</span>
          <span>{item.words}</span>
        </li>
      ))}
    </ul>
  )
}
