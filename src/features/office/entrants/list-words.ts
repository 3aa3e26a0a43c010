import type { OfficeDraw } from '#shared/schemas/api/office.ts'

/** Why the list of entrants cannot be changed, and what can be done; null where it can. */
export function whyFixed(draw: Pick<OfficeDraw, 'state' | 'may' | 'organisation'>): string | null {
  if (draw.may.changeEntrants) return null
  switch (draw.state) {
    case 'closed':
      return 'The list is closed. Until it is sealed, the promoter can reopen it with a public reason.'
    case 'sealed':
      return 'The list is sealed: nobody can change it. A mistake is put right by a new seal, with a public reason, before the draw.'
    case 'drawn':
    case 'concluded':
      return 'The draw is done. Its list stays as it was sealed.'
    case 'cancelled':
      return 'The draw is cancelled. Its list stays as it was.'
    case 'failed':
      return 'The draw failed. Its list stays as it was sealed.'
    case 'draft':
    case 'open':
      if (draw.organisation.state === 'suspended')
        return 'Your organisation is suspended: nothing can be changed. Write to the administrator of the site.'
      return draw.state === 'draft'
        ? 'Entrants come in once the promoter has opened the draw: its terms and prizes are published before the first ticket.'
        : 'You can read the list. Its organisers and promoters change it.'
  }
}
