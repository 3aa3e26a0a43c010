/** The outcome of something that may fail for expected reasons. Broken invariants throw instead. */
export type Result<T, E> = { readonly ok: true; readonly value: T } | { readonly ok: false; readonly error: E }

/** Why a record was refused: a code from a closed union, the place inside the record, and a plain sentence. */
export interface Failure<Code extends string> {
  readonly code: Code
  /** Where, as `picks[3].leaf`; empty for the record as a whole. */
  readonly at: string
  readonly message: string
}

/** Wraps a value that was arrived at. */
export function ok<T>(value: T): { readonly ok: true; readonly value: T } {
  return { ok: true, value }
}

/** Wraps an expected failure. */
export function err<E>(error: E): { readonly ok: false; readonly error: E } {
  return { ok: false, error }
}

/** Builds a failed result out of a code, a place and a sentence. */
export function fail<Code extends string>(
  code: Code,
  at: string,
  message: string,
): { readonly ok: false; readonly error: Failure<Code> } {
  return { ok: false, error: { code, at, message } }
}

/** The value of a result that cannot have failed here; throws an Error with the failure's words if it has. */
export function unwrap<T>(result: Result<T, Failure<string>>): T {
  if (result.ok) return result.value
  const { code, at, message } = result.error
  throw new Error(`${code}${at === '' ? '' : ` at ${at}`}: ${message}`)
}
