import { hasLoneSurrogate } from './bytes.ts'
import { fail, ok, type Failure, type Result } from './result.ts'

/** Anything that JSON can hold. Members are read with `Object.hasOwn`, never through a prototype. */
export type JsonValue =
  | null
  | boolean
  | number
  | string
  | readonly JsonValue[]
  | { readonly [member: string]: JsonValue }

/** Why a text is refused as JSON. `at` of the failure holds the offset in UTF-16 units. */
export type StrictJsonCode = 'not-json' | 'duplicate-member' | 'too-deep' | 'number-not-canonical' | 'lone-surrogate'

class Refusal extends Error {
  constructor(
    readonly code: StrictJsonCode,
    readonly offset: number,
    message: string,
  ) {
    super(message)
  }
}

const SPACE = /[\t\n\r ]*/y
const NUMBER = /-?(?:0|[1-9][0-9]*)(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?/y
// RFC 8259 section 7 forbids exactly these characters unescaped.
const STRING = /"(?:[^"\\\u0000-\u001f]|\\(?:["\\/bfnrt]|u[0-9a-fA-F]{4}))*"/y

/**
 * Parses JSON text (RFC 8259) with white space and any order of members, but refuses what `JSON.parse` lets pass: a
 * member named twice, nesting deeper than `maxDepth`, numbers not spelt as RFC 8785 spells them (so also integers that
 * lose digits), lone surrogates. For files that people write; signed bytes go through `parseCanonicalJson`.
 */
export function parseStrictJson(text: string, maxDepth: number): Result<JsonValue, Failure<StrictJsonCode>> {
  try {
    return ok(new Parser(text, maxDepth).parse())
  } catch (error) {
    if (error instanceof Refusal) return fail(error.code, String(error.offset), error.message)
    throw error
  }
}

class Parser {
  private offset = 0

  constructor(
    private readonly text: string,
    private readonly maxDepth: number,
  ) {}

  parse(): JsonValue {
    const value = this.value(0)
    this.space()
    if (this.offset !== this.text.length) this.refuse('not-json', 'Something stands behind the JSON value.')
    return value
  }

  private value(depth: number): JsonValue {
    this.space()
    const first = this.text[this.offset]
    if (first === '{') return this.object(depth + 1)
    if (first === '[') return this.array(depth + 1)
    if (first === '"') return this.string()
    for (const [word, value] of WORDS) {
      if (this.text.startsWith(word, this.offset)) {
        this.offset += word.length
        return value
      }
    }
    return this.number()
  }

  private object(depth: number): JsonValue {
    this.enter(depth)
    const members = new Map<string, JsonValue>()
    if (this.closes('}')) return {}
    for (;;) {
      this.space()
      const start = this.offset
      const name = this.string()
      if (members.has(name)) {
        this.offset = start
        this.refuse('duplicate-member', `The member ${JSON.stringify(name)} stands here twice.`)
      }
      this.space()
      if (this.text[this.offset] !== ':') this.refuse('not-json', 'A colon was expected.')
      this.offset += 1
      members.set(name, this.value(depth))
      // fromEntries defines own properties, so that a member called __proto__ is only a member.
      if (this.ends('}')) return Object.fromEntries(members)
    }
  }

  private array(depth: number): JsonValue {
    this.enter(depth)
    const items: JsonValue[] = []
    if (this.closes(']')) return items
    for (;;) {
      items.push(this.value(depth))
      if (this.ends(']')) return items
    }
  }

  private enter(depth: number): void {
    if (depth > this.maxDepth) this.refuse('too-deep', `This is nested deeper than ${this.maxDepth} levels.`)
    this.offset += 1
  }

  private closes(bracket: string): boolean {
    this.space()
    if (this.text[this.offset] !== bracket) return false
    this.offset += 1
    return true
  }

  private ends(bracket: string): boolean {
    this.space()
    const found = this.text[this.offset]
    if (found !== bracket && found !== ',') this.refuse('not-json', `A comma or ${bracket} was expected.`)
    this.offset += 1
    return found === bracket
  }

  private string(): string {
    const token = this.token(STRING)
    if (token === null) this.refuse('not-json', 'A string was expected.')
    const value = JSON.parse(token) as string
    if (hasLoneSurrogate(value)) this.refuse('lone-surrogate', 'This string holds a lone surrogate.')
    return value
  }

  private number(): number {
    const start = this.offset
    const token = this.token(NUMBER)
    if (token === null) this.refuse('not-json', 'A value was expected.')
    const value = Number(token)
    if (token !== String(value)) {
      this.offset = start
      this.refuse('number-not-canonical', `The number ${token.slice(0, 40)} is not spelt in its one canonical way.`)
    }
    return value
  }

  private space(): void {
    this.token(SPACE)
  }

  private token(pattern: RegExp): string | null {
    pattern.lastIndex = this.offset
    const match = pattern.exec(this.text)
    if (match === null) return null
    this.offset += match[0].length
    return match[0]
  }

  private refuse(code: StrictJsonCode, message: string): never {
    throw new Refusal(code, this.offset, message)
  }
}

const WORDS: readonly (readonly [string, JsonValue])[] = [
  ['true', true],
  ['false', false],
  ['null', null],
]
