export type CommandErrorCode =
  /** There is no such thing, or not here. */
  | 'not-found'
  /** A field is wrong: `fields` says which and what to do. */
  | 'invalid'
  /** Somebody else changed it in the meantime. */
  | 'changed'
  /** The state of things does not allow it. */
  | 'refused'
  /** A link that was used, taken back or is too old. */
  | 'expired'
  /** The password is not right. */
  | 'wrong-password'

/** An expected failure of a command: a whole sentence that says what to do, and the fields at fault. */
export class CommandError extends Error {
  constructor(
    readonly code: CommandErrorCode,
    message: string,
    readonly fields: readonly { readonly field: string; readonly message: string }[] = [],
  ) {
    super(message)
    this.name = 'CommandError'
  }
}

export const invalid = (field: string, message: string): CommandError =>
  new CommandError('invalid', message, [{ field, message }])
export const refused = (message: string): CommandError => new CommandError('refused', message)
export const notFound = (what: string): CommandError => new CommandError('not-found', `There is no such ${what}.`)
