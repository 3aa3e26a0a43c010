/** One page of many rows, as the API gives it. */
export interface Page<Row> {
  readonly items: readonly Row[]
  readonly total: number
  readonly page: number
  readonly pageSize: number
}
