import { firstAndLast } from './default-label.ts'

/** How an entrant chose to be announced: by the label that the organiser wrote, by initials, or by their code alone. */
export const ANNOUNCEMENTS = ['label', 'initials', 'code'] as const
export type Announcement = (typeof ANNOUNCEMENTS)[number]

/** The words that announce an entrant under their choice. `label` is the organiser's; `code` the entrant's stable code. */
export function announcedAs(
  choice: Announcement,
  entrant: { readonly name: string; readonly label: string; readonly code: string },
): string {
  switch (choice) {
    case 'label':
      return entrant.label
    case 'initials':
      return initialsOf(entrant.name)
    case 'code':
      return `Entrant ${entrant.code}`
  }
}

/** `Marta Quillon` → `M. Q.`; a name without letters or digits has none and stays out: `Entrant`. */
function initialsOf(name: string): string {
  const initials = firstAndLast(name).flatMap((word) => {
    const initial = /^[^\p{L}\p{N}]*([\p{L}\p{N}]\p{M}*)/u.exec(word)?.[1]
    return initial === undefined ? [] : [`${initial.toUpperCase()}.`]
  })
  return initials.length === 0 ? 'Entrant' : initials.join(' ')
}
