export type TicketState =
  | 'draft'
  | 'open'
  | 'closed'
  | 'sealed'
  | 'drawn'
  | 'concluded'
  | 'cancelled'
  | 'failed'
  | 'postponed'

const OUTLINE = 'M2 3.5h20v3.2a2.4 2.4 0 0 0 0 4.6v3.2H2v-3.2a2.4 2.4 0 0 0 0-4.6z'

const WORDS: Record<TicketState, string> = {
  draft: 'Draft',
  open: 'Open',
  closed: 'Closed',
  sealed: 'Sealed',
  drawn: 'Drawn',
  concluded: 'Concluded',
  cancelled: 'Cancelled',
  failed: 'Failed',
  postponed: 'Postponed',
}

/** A draw's state as the shape of a ticket, always with its word. */
export function StateTicket({ state }: { readonly state: TicketState }) {
  return (
    <span className="state">
      <svg viewBox="0 0 24 18" width="27" height="20" aria-hidden="true">
        <Shape state={state} />
      </svg>
      {WORDS[state]}
    </span>
  )
}

function Shape({ state }: { readonly state: TicketState }) {
  switch (state) {
    case 'draft':
      return <path d={OUTLINE} strokeDasharray="2.6 2.2" />
    case 'open':
      return <path d="M17 3.5h5v3.2a2.4 2.4 0 0 0 0 4.6v3.2H2v-3.2a2.4 2.4 0 0 0 0-4.6V3.5h6" />
    case 'closed':
      return <path d={OUTLINE} />
    case 'sealed':
      return (
        <>
          <path d={OUTLINE} />
          <path d="M12 5.5v7M8.9 7.2l6.2 3.6M15.1 7.2l-6.2 3.6" strokeWidth="1.5" />
        </>
      )
    case 'drawn':
      return (
        <>
          <path d={OUTLINE} />
          <path className="fill" d="M2 3.5h10v11H2v-3.2a2.4 2.4 0 0 0 0-4.6z" />
        </>
      )
    case 'concluded':
      return <path className="fill" d={OUTLINE} />
    case 'postponed':
      return (
        <>
          <path d={OUTLINE} />
          <path d="M10 6.2v5.6M14 6.2v5.6" />
        </>
      )
    case 'cancelled':
      return (
        <>
          <path d={OUTLINE} />
          <path d="M6 15.5L18 2.5" />
        </>
      )
    case 'failed':
      return (
        <>
          <path d={OUTLINE} />
          <path d="M8.6 5.6l6.8 6.8M15.4 5.6l-6.8 6.8" />
        </>
      )
  }
}
