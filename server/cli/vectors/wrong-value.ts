import { sha256 } from '#server/adapters/hash/sha256.ts'
import { canonicalText } from '#shared/bytes/canonical-json.ts'

/** The first wrong value of a file: which case, which field, and what stands there against what belongs there. */
export class WrongValue extends Error {
  constructor(
    readonly caseName: string,
    readonly field: string,
    message: string,
  ) {
    super(`${caseName}, ${field}: ${message}`)
  }
}

/** The hash that every check here uses. */
export const hash = sha256

/** Compares by canonical JSON; throws a WrongValue that shows both, shortened. */
export function expectSame(caseName: string, field: string, found: unknown, computed: unknown): void {
  const stands = canonicalText(found)
  const belongs = canonicalText(computed)
  if (stands !== belongs) {
    throw new WrongValue(caseName, field, `the file says ${shorten(stands)}, computed is ${shorten(belongs)}`)
  }
}

/** The members of a case, which must be exactly the wanted ones (`optional` may be missing). */
export function expectMembers(
  caseName: string,
  value: unknown,
  names: readonly string[],
  optional: readonly string[] = [],
): Readonly<Record<string, unknown>> {
  if (!isObject(value)) throw new WrongValue(caseName, 'case', 'an object was expected')
  for (const name of names) {
    if (!Object.hasOwn(value, name)) throw new WrongValue(caseName, name, 'this field is missing')
  }
  for (const name of Object.keys(value)) {
    if (!names.includes(name) && !optional.includes(name)) throw new WrongValue(caseName, name, 'this field is unknown')
  }
  return value
}

/** Runs a reader that throws on malformed values, and names the field where it does. */
export function reading<T>(caseName: string, field: string, read: () => T): T {
  try {
    return read()
  } catch (error) {
    if (error instanceof WrongValue) throw error
    throw new WrongValue(caseName, field, error instanceof Error ? error.message : String(error))
  }
}

/** A text, number or list of a case; throws a WrongValue for anything else. */
export function textOf(caseName: string, field: string, value: unknown): string {
  if (typeof value !== 'string') throw new WrongValue(caseName, field, 'a text was expected')
  return value
}
export function numberOf(caseName: string, field: string, value: unknown): number {
  if (typeof value !== 'number') throw new WrongValue(caseName, field, 'a number was expected')
  return value
}
export function listOf(caseName: string, field: string, value: unknown): readonly unknown[] {
  if (!Array.isArray(value)) throw new WrongValue(caseName, field, 'a list was expected')
  return value as readonly unknown[]
}

export function isObject(value: unknown): value is Readonly<Record<string, unknown>> {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
}

function shorten(text: string): string {
  return text.length > 160 ? `${text.slice(0, 160)}…` : text
}
