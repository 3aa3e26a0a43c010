/** One page of many rows, as the API gives it. */
export interface Page<T> {
  readonly items: T[]
  readonly total: number
  readonly page: number
  readonly pageSize: number
}

export const offsetOf = (page: number, pageSize: number): number => (page - 1) * pageSize

/** A pattern for LIKE that finds the words as they are typed: `%` and `_` stand for themselves. */
export const containing = (words: string): string => `%${words.toLowerCase().replace(/[\\%_]/g, '\\$&')}%`
