/** A line of the log in plain words. An event that this page does not know is shown under its own name. */
const EVENTS: Record<string, readonly [title: string, meaning: string]> = {
  opened: ['Opened', 'The terms were published and entries opened.'],
  closed: ['Closed', 'The list took its last entry.'],
  reopened: ['Reopened', 'The promoter opened the list again.'],
  sealed: ['Sealed', 'The list, the prizes and the rule were signed and published.'],
  replaced: ['Seal replaced', 'A new seal took the place of the one before.'],
  postponed: ['Postponed', 'The promoter changed the dates.'],
  cancelled: ['Cancelled', 'The promoter ended the draw before anything was drawn.'],
  'tosses-done': ['Tosses done', 'The tosses in the hall were finished and counted.'],
  drawn: ['Drawn', 'The coins were tossed and the result signed.'],
  failed: ['Failed', 'A source that the seal named could not be shown in time.'],
  revealed: ['Seed opened', 'The sealed secret was opened.'],
  promoted: ['Reserve called', 'A prize passed to the next reserve.'],
  forfeited: ['Prize forfeited', 'A prize was not claimed, or was refused.'],
  substituted: ['Prize substituted', 'Another prize took the place of the one announced.'],
  withheld: ['Name withheld', 'A name was taken down; the proof stays whole.'],
  suspended: ['Organisation suspended', 'The site stopped the organisation from changing anything.'],
  restored: ['Organisation restored', 'The site let the organisation work again.'],
  checkpointed: ['Log signed', 'The site signed the log as it stood.'],
}

/** What the words depend on. The log has no event of its own for a list that opens again: that one alone says why. */
export interface EventLine {
  readonly event: string
  readonly note: string | null
}

const wordsOf = ({ event, note }: EventLine) => EVENTS[event === 'opened' && note !== null ? 'reopened' : event]

export const eventTitle = (line: EventLine): string => wordsOf(line)?.[0] ?? line.event

export const eventMeaning = (line: EventLine): string => wordsOf(line)?.[1] ?? ''
