import { MAX_PICKS, MIN_SEAL_LEAD } from '#shared/protocol/limits.ts'
import type { DrawState } from '#shared/schemas/values.ts'

/** What opening and sealing depend on. */
export interface DrawFacts {
  readonly state: DrawState
  readonly organisationState: 'pending' | 'approved' | 'suspended'
  readonly closesAt: Date
  readonly drawAt: Date
  readonly entrants: number
  readonly tickets: number
  readonly prizes: readonly { readonly quantity: number }[]
  readonly reserves: number
}

/** Seconds that sealing a list takes, at a careful guess: the draw must lie so much further ahead. */
export const sealingSeconds = (entrants: number): number => 5 + Math.ceil(entrants / 5000)

/** What stands in the way of opening a draw for entries: sentences that say what to do. */
export function problemsOfOpening(facts: DrawFacts, now: Date): string[] {
  if (facts.state !== 'draft') return []
  const problems = commonProblems(facts)
  if (facts.organisationState === 'pending') {
    problems.push('Your organisation is not approved yet. Wait for the administrator of the site, or write to them.')
  }
  if (facts.closesAt <= now) problems.push('The closing time has passed. Choose a later one.')
  return problems
}

/** What stands in the way of sealing a list. */
export function problemsOfSealing(facts: DrawFacts, now: Date): string[] {
  if (!['draft', 'open', 'closed'].includes(facts.state)) return []
  const problems: string[] = []
  if (facts.state === 'draft') problems.push('Open the draw for entries first.')
  if (facts.state === 'open') problems.push('Close the list first: a seal fixes a list that nobody adds to any more.')
  if (facts.entrants === 0 && facts.state !== 'draft') {
    problems.push('The list is empty. Add an entrant or import a file, then seal it.')
  }
  problems.push(...commonProblems(facts))
  const earliest = MIN_SEAL_LEAD + sealingSeconds(facts.entrants)
  const left = (facts.drawAt.getTime() - now.getTime()) / 1000
  if (left <= 0) problems.push('The draw time has passed. Postpone the draw to a later time, then seal it.')
  else if (left < earliest) {
    problems.push(
      `The draw time is too near: the randomness must lie at least ${earliest} seconds after the seal. Postpone the draw.`,
    )
  }
  return problems
}

function commonProblems(facts: DrawFacts): string[] {
  const problems: string[] = []
  const items = facts.prizes.reduce((sum, { quantity }) => sum + quantity, 0)
  if (facts.prizes.length === 0) problems.push('There are no prizes. Add at least one.')
  if (items + facts.reserves > MAX_PICKS) {
    problems.push('Prizes and reserves together are more than 100,000. Lower a quantity or the number of reserves.')
  }
  return problems
}

/** What waits for somebody, in a sentence; null where nothing does. */
export function waitingFor(facts: DrawFacts, now: Date): string | null {
  switch (facts.state) {
    case 'draft':
      return problemsOfOpening(facts, now).length > 0 ? 'Finish the draft.' : 'Open it for entries when you are ready.'
    case 'open':
      return facts.entrants === 0 ? 'Add the first entrants.' : null
    case 'closed':
      return facts.drawAt <= now ? 'The draw time passed without a seal: postpone it or cancel.' : 'Seal the list.'
    default:
      return null
  }
}
