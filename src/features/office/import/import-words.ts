import type { ImportView } from '#shared/schemas/api/office.ts'
import { countOf, formatNumber } from '#src/ui/format-number.ts'

type Told = Pick<ImportView, 'state' | 'entrants' | 'tickets' | 'errorCount' | 'failure'>

/** What became of an import, in a sentence. */
export function importWords(view: Told): string {
  const found = `${countOf(view.entrants, 'entrant')} with ${countOf(view.tickets, 'ticket')}`
  switch (view.state) {
    case 'reading':
      return 'The site is reading it.'
    case 'ready':
      return `Without errors: ${found}. Not in the list yet.`
    case 'faulty':
      return `${countOf(view.errorCount, 'error')}. Nothing of it is in the list.`
    case 'applying':
      return 'Its entrants are being brought in.'
    case 'applied':
      return `Brought in: ${found}.`
    case 'discarded':
      return 'Thrown away. Nothing of it is in the list.'
    case 'failed':
      return view.failure ?? 'It could not be read to its end. Nothing of it is in the list.'
  }
}

/** How far the reading is; null where the size of the file is not known. */
export function readShare({ bytesRead, bytesTotal }: Pick<ImportView, 'bytesRead' | 'bytesTotal'>): number | null {
  return bytesTotal > 0 ? Math.min(1, bytesRead / bytesTotal) : null
}

/** An import that was brought in before and looks like the same file; undefined where none does. */
export function likeness<Earlier extends Pick<ImportView, 'id' | 'state' | 'fileName' | 'entrants' | 'tickets'>>(
  view: Pick<ImportView, 'id' | 'fileName' | 'entrants' | 'tickets'>,
  earlier: readonly Earlier[],
): Earlier | undefined {
  return earlier.find(
    (other) =>
      other.id !== view.id &&
      other.state === 'applied' &&
      ((other.entrants === view.entrants && other.tickets === view.tickets) || other.fileName === view.fileName),
  )
}

/** "Rows 4, 9 and 12", "Rows 4, 9, 12 and 31 more". */
export function rowList(rows: readonly number[], most = 12): string {
  const shown = rows.slice(0, most).map(formatNumber)
  const more = rows.length - shown.length
  if (shown.length === 1 && more === 0) return `Row ${shown[0]}`
  const last = more > 0 ? `${formatNumber(more)} more` : (shown.pop() as string)
  return `Rows ${shown.join(', ')} and ${last}`
}
