import atkinson from '@fontsource-variable/atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-wght-normal.woff2?url'
import bricolage from '@fontsource-variable/bricolage-grotesque/files/bricolage-grotesque-latin-opsz-normal.woff2?url'
import type { ReactNode } from 'react'

export interface Assets {
  readonly scripts: readonly string[]
  readonly styles: readonly string[]
  readonly preload: readonly string[]
}

interface DocumentProps {
  readonly assets: Assets
  /** JSON for the browser to go on with: already escaped for a script element. */
  readonly state: string
  readonly children: ReactNode
}

export const STATE_ID = 'evenpenny-state'

/** The whole document, the same on the server and in the browser. */
export function Document({ assets, state, children }: DocumentProps) {
  return (
    <html lang="en-GB">
      <head>
        <meta charSet="utf-8" />
        <meta name="viewport" content="width=device-width, initial-scale=1" />
        <meta name="color-scheme" content="light dark" />
        <meta name="theme-color" content="#fafaf6" media="(prefers-color-scheme: light)" />
        <meta name="theme-color" content="#141917" media="(prefers-color-scheme: dark)" />
        <link rel="icon" href="/favicon.svg" type="image/svg+xml" />
        <link rel="preload" href={bricolage} as="font" type="font/woff2" crossOrigin="anonymous" />
        <link rel="preload" href={atkinson} as="font" type="font/woff2" crossOrigin="anonymous" />
        {assets.styles.map((href) => (
          <link key={href} rel="stylesheet" href={href} />
        ))}
        {assets.preload.map((href) => (
          <link key={href} rel="modulepreload" href={href} />
        ))}
      </head>
      <body>
        {children}
        <script
          id={STATE_ID}
          type="application/json"
          suppressHydrationWarning
          dangerouslySetInnerHTML={{ __html: state }}
        />
      </body>
    </html>
  )
}
