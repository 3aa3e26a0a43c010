import { importTerms, importText, multilineProblem, TEXT_PROBLEMS, textProblem } from '#shared/bytes/text.ts'
import type { DrawInput } from '#shared/schemas/api/office.ts'
import { CommandError, invalid } from '#server/commands/command-error.ts'
import { instantFromLocal } from '#server/time/local-time.ts'

/** A wall-clock time from a form as an instant. Throws for one that does not exist, or exists twice. */
export function readLocalTime(field: string, local: string, timeZone: string): Date {
  const result = instantFromLocal(local, timeZone)
  if (!result.ok) throw invalid(field, result.message)
  return result.date
}

/** Public words in one line: line feeds become spaces, because a seal may hold the reason. */
export function readReason(reason: string): string {
  const words = importText(reason).replace(/\s+/g, ' ').trim()
  const problem = textProblem(words)
  if (problem !== null) throw invalid('reason', `The reason ${TEXT_PROBLEMS[problem]}. Type it again without it.`)
  if (words === '') throw invalid('reason', 'Say why in a sentence: the public reads it.')
  return words
}

/** The columns of a draw out of what an organiser typed. Throws with every field at fault. */
export function drawValues(input: DrawInput, timeZone: string) {
  const fields: { field: string; message: string }[] = []
  const time = (field: string, local: string): Date => {
    const result = instantFromLocal(local, timeZone)
    if (result.ok) return result.date
    fields.push({ field, message: result.message })
    return new Date(Number.NaN)
  }
  const closesAt = time('closesAt', input.closesAt)
  const drawAt = time('drawAt', input.drawAt)
  if (drawAt < closesAt) fields.push({ field: 'drawAt', message: 'The draw must come after the closing time.' })
  const terms = importTerms(input.terms)
  const problem = multilineProblem(terms)
  if (problem !== null) {
    fields.push({ field: 'terms', message: `The text ${TEXT_PROBLEMS[problem]}. Type it again without it.` })
  }
  if (fields.length > 0) {
    const message = fields.length === 1 ? (fields[0]?.message ?? '') : `${fields.length} fields need another look.`
    throw new CommandError('invalid', message, fields)
  }
  return {
    title: input.title,
    goodCause: input.goodCause,
    promoterName: input.promoterName,
    promoterAddress: input.promoterAddress,
    licence: input.licence,
    ticketPriceMinor: input.ticketPrice?.minor ?? null,
    ticketPriceCurrency: input.ticketPrice?.currency ?? null,
    minimumAge: input.minimumAge,
    terms,
    timeZone,
    closesAt,
    drawAt,
    rule: input.rule,
    reserves: input.reserves,
  }
}

const MAX_SLUG = 60

/** An address for the web out of a title: letters without accents, digits and hyphens. */
export function slugFrom(title: string): string {
  const plain = title
    .normalize('NFKD')
    .replace(/\p{M}/gu, '')
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, '-')
    .replace(/^-+|-+$/g, '')
  if (plain === '') return 'draw'
  if (plain.length <= MAX_SLUG) return plain
  // A long title ends with a whole word.
  const end = plain.lastIndexOf('-', MAX_SLUG)
  return plain.slice(0, end > MAX_SLUG / 2 ? end : MAX_SLUG)
}
