import { entrantSort, listEntrants } from '#shared/schemas/api/office.ts'
import { drawPath } from '../paths.ts'

export type SortColumn = (typeof entrantSort.options)[number]

export interface EntrantListSearch {
  readonly q: string
  readonly sort: SortColumn
  readonly direction: 'up' | 'down'
  readonly page: number
}

const FIRST: EntrantListSearch = { q: '', sort: 'added', direction: 'up', page: 1 }

/** A search out of an address, in which a minus sign before the column turns the order round: `?sort=-tickets`. */
export function entrantSearchFrom(params: URLSearchParams): EntrantListSearch {
  const order = params.get('sort') ?? ''
  const { shape } = listEntrants.query
  return {
    q: params.get('q')?.trim().slice(0, 100) ?? '',
    sort: entrantSort.safeParse(order.replace(/^-/, '')).data ?? FIRST.sort,
    direction: order.startsWith('-') ? 'down' : 'up',
    page: shape.page.safeParse(params.get('page') ?? undefined).data ?? 1,
  }
}

/** How a search's order stands in an address. */
export function orderText({ sort, direction }: Pick<EntrantListSearch, 'sort' | 'direction'>): string {
  return direction === 'down' ? `-${sort}` : sort
}

/** The address of a search; what is as at first is left out of it. */
export function entrantsHref(organisation: string, draw: string, search: Partial<EntrantListSearch>): string {
  const { q, page, ...order } = { ...FIRST, ...search }
  const params = new URLSearchParams()
  if (q) params.set('q', q)
  if (orderText(order) !== orderText(FIRST)) params.set('sort', orderText(order))
  if (page > 1) params.set('page', String(page))
  return `${drawPath(organisation, draw, 'entrants')}${params.size > 0 ? `?${params}` : ''}`
}

/** The order that a column's head leads to: its own, upwards, or the other way round where it is in use. */
export function nextOrder(
  search: Pick<EntrantListSearch, 'sort' | 'direction'>,
  column: SortColumn,
): Pick<EntrantListSearch, 'sort' | 'direction'> {
  if (search.sort === column) return { sort: column, direction: search.direction === 'up' ? 'down' : 'up' }
  // Most people look for the most tickets, not the fewest.
  return { sort: column, direction: column === 'tickets' ? 'down' : 'up' }
}
