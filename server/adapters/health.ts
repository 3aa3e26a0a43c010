/** What a look at an outside service found. */
export interface Health {
  readonly ok: boolean
  readonly milliseconds: number
  /** A sentence for the administrator. */
  readonly detail: string
}

/** The words of a thrown value, with the cause that Node's fetch hides behind "fetch failed". */
export function reasonOf(error: unknown): string {
  if (!(error instanceof Error)) return String(error)
  const { cause } = error
  if (cause instanceof Error && cause.message !== '') return cause.message
  const { code } = error as NodeJS.ErrnoException
  return error.message || code || error.name
}
