import { z } from 'zod'

/** RFC 9457 problem details. `errors` names each field at fault (RFC 6901 pointer without the slash) and what to do. */
export const problemSchema = z.object({
  type: z.string(),
  title: z.string(),
  status: z.int(),
  detail: z.string(),
  instance: z.string().optional(),
  errors: z.array(z.object({ field: z.string(), message: z.string() })).optional(),
})
export type ProblemDetails = z.infer<typeof problemSchema>

/** The failure that every API call can end with, on both sides of the wire. */
export class Problem extends Error {
  readonly details: ProblemDetails
  constructor(details: ProblemDetails) {
    super(details.detail)
    this.name = 'Problem'
    this.details = details
  }
}
