import { isHex } from '../bytes/hex.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import { textProblem, TEXT_PROBLEMS } from '../bytes/text.ts'
import { parseTime } from '../bytes/time.ts'

/**
 * Strict reading of parsed records (PROTOCOL "Writing"): a member that is missing or unknown fails, booleans are not
 * numbers, hex has exactly its length. Doubled members and numbers spelt otherwise fail earlier, on the bytes.
 */

/** What can be wrong with a record's shape, before any rule about its meaning. */
export type ShapeCode =
  | 'object-expected'
  | 'list-expected'
  | 'member-missing'
  | 'member-unknown'
  | 'number-wrong'
  | 'text-wrong'
  | 'hex-wrong'
  | 'time-wrong'
  | 'value-wrong'

/** An object whose members are known to be exactly the wanted ones. */
export type Members<Name extends string> = Readonly<Record<Name, unknown>>

class ShapeError<Code extends string> extends Error {
  constructor(readonly failure: Failure<Code>) {
    super(failure.message)
  }
}

/** Runs readers, which refuse by throwing inside, and returns their result or the first refusal. */
export function readShape<T, Code extends string = ShapeCode>(read: () => T): Result<T, Failure<Code>> {
  try {
    return ok(read())
  } catch (error) {
    if (error instanceof ShapeError) return { ok: false, error: error.failure as Failure<Code> }
    throw error
  }
}

/** Refuses from inside `readShape`. */
export function refuse<Code extends string>(code: Code, at: string, message: string): never {
  throw new ShapeError(fail(code, at, message).error)
}

/** An object with exactly these members. */
export function members<Name extends string>(value: unknown, names: readonly Name[], at: string): Members<Name> {
  if (typeof value !== 'object' || value === null || Array.isArray(value)) {
    return refuse('object-expected', at, 'An object was expected here.')
  }
  for (const name of names) {
    if (!Object.hasOwn(value, name)) refuse('member-missing', place(at, name), `The member ${name} is missing.`)
  }
  for (const name of Object.keys(value)) {
    if (!(names as readonly string[]).includes(name)) {
      refuse('member-unknown', place(at, name), `The member ${JSON.stringify(name.slice(0, 40))} is not known here.`)
    }
  }
  return value as Members<Name>
}

/** A list. */
export function list(value: unknown, at: string): readonly unknown[] {
  if (!Array.isArray(value)) return refuse('list-expected', at, 'A list was expected here.')
  return value as readonly unknown[]
}

/** A whole number in a range, both ends included. */
export function whole(value: unknown, min: number, max: number, at: string): number {
  if (typeof value !== 'number' || !Number.isSafeInteger(value) || Object.is(value, -0) || value < min || value > max) {
    return refuse('number-wrong', at, `A whole number from ${min} to ${max} was expected here.`)
  }
  return value
}

/** One line of allowed characters; empty only where `empty` says so. */
export function text(value: unknown, at: string, empty: 'may-be-empty' | 'not-empty' = 'not-empty'): string {
  if (typeof value !== 'string') return refuse('text-wrong', at, 'A text was expected here.')
  if (value === '' && empty === 'not-empty') refuse('text-wrong', at, 'This text is empty.')
  const problem = textProblem(value)
  if (problem !== null) refuse('text-wrong', at, `This text ${TEXT_PROBLEMS[problem]}.`)
  return value
}

/** Lower-case hex of exactly `bytes` bytes. */
export function hex(value: unknown, bytes: number, at: string): string {
  if (!isHex(value, bytes)) return refuse('hex-wrong', at, `${bytes} bytes in lower-case hex were expected here.`)
  return value
}

/** A time of the record, as written; `parseTime` of it is not null. */
export function time(value: unknown, at: string): string {
  if (parseTime(value) === null) {
    return refuse('time-wrong', at, 'A time written YYYY-MM-DDThh:mm:ssZ was expected here.')
  }
  return value as string
}

/** One of a few words. */
export function oneOf<Word extends string>(value: unknown, words: readonly Word[], at: string): Word {
  if (!(words as readonly unknown[]).includes(value)) {
    return refuse('value-wrong', at, `This must be ${words.join(' or ')}.`)
  }
  return value as Word
}

/** Null, or what `read` makes of the value. */
export function nullable<T>(value: unknown, read: (value: unknown) => T): T | null {
  return value === null ? null : read(value)
}

/** The place of a member inside a record, as `sources.beacon`. */
export function place(at: string, name: string): string {
  return at === '' ? name : `${at}.${name}`
}
