import { MAX_TICKETS_EACH } from '#shared/protocol/limits.ts'

/** The number of tickets that a reader typed: null for nothing, 'wrong' for what nobody can hold. */
export function ticketsAsked(typed: string | null): number | null | 'wrong' {
  const text = (typed ?? '').trim()
  if (text === '') return null
  const tickets = /^\d{1,10}$/.test(text) ? Number(text) : 0
  return tickets >= 1 && tickets <= MAX_TICKETS_EACH ? tickets : 'wrong'
}

export const TICKETS_WRONG = 'Type a whole number from 1 to 4,294,967,295.'
