import { Fragment } from 'react'

/** An address that breaks before its slashes where it has to. */
export function Path({ path }: { readonly path: string }) {
  return (
    <code>
      {path
        .split('/')
        .filter((part) => part !== '')
        .map((part, index) => (
          <Fragment key={index}>
            <wbr />/{part}
          </Fragment>
        ))}
    </code>
  )
}
