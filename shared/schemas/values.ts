import { z } from 'zod'

export const empty = z.object({})
export const nothing = z.null()
/** SHA-256 or another 32-byte value, lower-case hexadecimal. */
export const hex32 = z.string().regex(/^[0-9a-f]{64}$/)
/** An instant in UTC, whole seconds: `2026-12-11T19:30:00Z`. */
export const instant = z.string().regex(/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ$/)
/** A wall-clock time in the organisation's time zone, as a form gives it: `2026-12-11T19:30`. */
export const localTime = z
  .string()
  .regex(/^\d{4}-\d\d-\d\dT\d\d:\d\d$/, 'Type a date and a time, for example 11 December 2026, 19:30.')
export const slug = z
  .string()
  .regex(/^[a-z0-9]+(?:-[a-z0-9]+)*$/)
  .max(80)
export const uuid = z.uuid()
export const page = z.coerce.number().int().min(1).max(1_000_000).default(1)
export const email = z.email('Type an e-mail address, for example ana@group.example.').max(254)
/** Ticket count of one entrant: PROTOCOL limit 1 … 2^32 − 1. */
export const tickets = z
  .int('Type a whole number of tickets.')
  .min(1, 'Type at least 1 ticket.')
  .max(4_294_967_295, 'An entrant holds at most 4,294,967,295 tickets.')
export const totalTickets = z.int().min(0).max(Number.MAX_SAFE_INTEGER)
/** One line of plain text: trimmed, NFC, no control or bidirectional characters. */
export const line = (max: number, what = 'Type something here.') =>
  z
    .string()
    .transform((text) => text.normalize('NFC').trim())
    .refine(
      (text) => !/[\u0000-\u001f\u007f-\u009f\u2028\u2029\u200e\u200f\u061c\u202a-\u202e\u2066-\u2069]/.test(text),
      'Leave out line breaks and invisible control characters.',
    )
    .refine((text) => !/[\ud800-\udfff]/u.test(text), 'A character in this text is damaged. Type it again.')
    .pipe(z.string().min(1, what).max(max, `Use at most ${max} characters.`))
/** As {@link line}, or nothing. A fault is told in the words of the line. */
export const optionalLine = (max: number) =>
  z.union([z.literal('').transform(() => null), z.null(), line(max)], {
    error: (issue) => (issue.code === 'invalid_union' ? issue.errors.at(-1)?.at(0)?.message : undefined),
  })
/** Several lines of plain text. */
export const text = (max: number, what = 'Type something here.') =>
  z
    .string()
    .transform((value) => value.replace(/\r\n?/g, '\n').normalize('NFC').trim())
    .pipe(z.string().min(1, what).max(max, `Use at most ${max} characters.`))
export const money = z.object({
  minor: z.int().min(0).max(Number.MAX_SAFE_INTEGER),
  currency: z.string().regex(/^[A-Z]{3}$/),
})

export const drawState = z.enum(['draft', 'open', 'closed', 'sealed', 'drawn', 'concluded', 'cancelled', 'failed'])
export type DrawState = z.infer<typeof drawState>
export const rule = z.enum(['one-prize-each', 'every-ticket'])
export type Rule = z.infer<typeof rule>
export const organisationState = z.enum(['pending', 'approved', 'suspended'])
export const role = z.enum(['promoter', 'organiser', 'witness'])
export type Role = z.infer<typeof role>

export const paged = <T extends z.ZodType>(item: T) =>
  z.object({ items: z.array(item), total: z.int().min(0), page: z.int().min(1), pageSize: z.int().min(1) })
