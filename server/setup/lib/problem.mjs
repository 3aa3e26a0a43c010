// @ts-check
/** A set-up that cannot go on for a reason that the person at the terminal can mend: shown as its sentences, no stack. */
export class SetupProblem extends Error {
  /** @param {string} message whole sentences: what was found and what to do */
  constructor(message) {
    super(message)
    this.name = 'SetupProblem'
  }
}

/**
 * What to print for anything thrown: the sentences of a SetupProblem, the stack of everything else.
 * @param {unknown} error
 */
export function describeFailure(error) {
  if (error instanceof SetupProblem) return error.message
  return error instanceof Error ? (error.stack ?? error.message) : String(error)
}
