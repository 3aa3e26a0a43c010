import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'

/** Most tickets of one entrant (PROTOCOL, Limits). */
export const MAX_TICKETS = 2 ** 32 - 1

export type TicketCountCode =
  | 'tickets-missing'
  | 'tickets-formula'
  | 'tickets-zero'
  | 'tickets-negative'
  | 'tickets-fractional'
  | 'tickets-huge'
  | 'tickets-unreadable'

/**
 * Reads a ticket count as a person types it: ASCII digits and nothing else, 1 to 2^32 - 1. Messages continue after
 * "Row 7: " and say what to write instead.
 */
export function parseTicketCount(text: string): Result<number, Failure<TicketCountCode>> {
  const refuse = (code: TicketCountCode, message: string) => fail(code, 'tickets', message)
  const shown = JSON.stringify(text)
  if (text === '') {
    return refuse(
      'tickets-missing',
      'there is no number of tickets. Write a whole number, 1 or more, or delete the row.',
    )
  }
  if (/^[=@]/.test(text) || /^[+-][^0-9.]/.test(text)) {
    return refuse('tickets-formula', `the number of tickets is a formula, ${shown}. Write the number itself.`)
  }
  if (/^-[0-9]/.test(text)) {
    return refuse('tickets-negative', `${shown} tickets is less than none. Write a whole number, 1 or more.`)
  }
  if (/^0+$/.test(text)) {
    return refuse('tickets-zero', 'it has no tickets. Write a whole number, 1 or more, or delete the row.')
  }
  if (/^[0-9]{1,3}([,.' \u00a0][0-9]{3})+$/.test(text)) {
    return refuse('tickets-unreadable', `write ${shown} as plain digits, without signs between thousands.`)
  }
  if (/^[0-9]*[.,][0-9]+$/.test(text)) {
    return refuse(
      'tickets-fractional',
      `${shown} is not a whole number of tickets. Write 1 or more, without a fraction.`,
    )
  }
  if (/^0+[1-9][0-9]*$/.test(text)) {
    return refuse('tickets-unreadable', `write ${shown} without zeros in front, like ${text.replace(/^0+/, '')}.`)
  }
  if (!/^[1-9][0-9]*$/.test(text)) {
    return refuse('tickets-unreadable', `${shown} is not a whole number of tickets. Write it in digits, like 25.`)
  }
  const count = Number(text)
  if (count > MAX_TICKETS) {
    return refuse('tickets-huge', `${shown} is more than the 4,294,967,295 tickets that one entrant can hold.`)
  }
  return ok(count)
}
