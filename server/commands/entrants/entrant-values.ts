import type { z } from 'zod'
import { defaultLabel } from '#shared/entrants/default-label.ts'
import { parseTicketNumbers, type TicketRange } from '#shared/entrants/ticket-numbers.ts'
import type { entrantInput } from '#shared/schemas/api/office.ts'
import { MAX_TICKETS } from '#shared/protocol/limits.ts'
import type { CommandError } from '#server/commands/command-error.ts'
import { invalid, refused } from '#server/commands/command-error.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import { refusalOf } from '#server/store/database.ts'
import { entrantNumbers } from '#server/store/schema/entrant.ts'

export type EntrantInput = z.output<typeof entrantInput>

export interface EntrantValues {
  readonly name: string
  readonly label: string
  readonly email: string | null
  readonly phone: string | null
  readonly numbers: string | null
  readonly ranges: readonly TicketRange[]
}

/** The columns of a person out of what an organiser typed. Throws where the ticket numbers cannot be read. */
export function entrantValues(input: EntrantInput): EntrantValues {
  const read = parseTicketNumbers(input.numbers ?? '')
  if (!read.ok) {
    const part = JSON.stringify(read.part)
    throw invalid('numbers', `The ticket numbers ${part} cannot be read. Write them like 101-120, 133.`)
  }
  return {
    name: input.name,
    label: input.label ?? defaultLabel(input.name),
    email: input.email?.trim() ?? null,
    phone: input.phone,
    numbers: input.numbers,
    ranges: read.ranges,
  }
}

/** `[101,121)` for 101 to 120. */
export const rangeText = ({ from, to }: Pick<TicketRange, 'from' | 'to'>): string => `[${from},${to + 1})`

/** Writes the ticket numbers of one entrant. Throws where another entrant holds one of them. */
export async function putNumbers(
  tx: Transaction,
  entrantOf: { readonly drawId: string; readonly entrantId: number },
  ranges: readonly TicketRange[],
): Promise<void> {
  if (ranges.length === 0) return
  try {
    await tx.db
      .insert(entrantNumbers)
      .values(ranges.map((range) => ({ ...entrantOf, series: range.series, range: rangeText(range) })))
  } catch (error) {
    throw numbersHeldTwice(error) ?? error
  }
}

/** The words for a ticket number that somebody else holds; null for any other failure. */
export function numbersHeldTwice(error: unknown): CommandError | null {
  if (refusalOf(error)?.constraint !== 'entrant_numbers_held_once') return null
  return invalid(
    'numbers',
    'Another entrant of this draw holds one of these ticket numbers. Look at the counterfoil and correct one of the two.',
  )
}

/** The words for a total beyond what a draw can hold. */
export function checkTotal(before: number, change: number): void {
  if (before + change > MAX_TICKETS)
    throw refused('With these tickets the draw would have more than 9,007,199,254,740,991.')
}
