import type { Actor, Resource } from '#server/http/authorisation/actor.ts'

/** What a handler may do with the visitor's session. Both take effect when the response leaves. */
export interface SessionControl {
  /** Ends the present session and starts a new one, with a new id, for this person. */
  start(personId: string): Promise<void>
  end(): Promise<void>
  /** The stored id of the present session; null where there is none. */
  readonly id: string | null
}

/** A file on its way in; nothing of it is kept in memory. */
export interface Upload {
  readonly fileName: string
  /** Size of the whole request in bytes, as its sender stated it; 0 where it stated none. */
  readonly bytesTotal: number
  /** Throws where the sender goes away half-way, and where the file turns out to be too large. */
  readonly bytes: AsyncIterable<Uint8Array>
  /** Aborted when they do. */
  readonly signal: AbortSignal
}

/** One visitor's request, the same for calls over HTTP and for calls made while a page is rendered. */
export interface RequestContext {
  readonly actor: Actor
  readonly session: SessionControl
  /** The visitor's network address. */
  readonly address: string
  readonly requestId: string
}

/** What a handler is given: the request, and what its rule was decided on. */
export interface CallContext extends RequestContext {
  readonly resource: Resource | null
  readonly upload: Upload | null
}

/** The signed-in person. Only for handlers whose rule lets nobody else through. */
export function personOf(context: CallContext): NonNullable<Actor['person']> {
  if (!context.actor.person) throw new Error('This handler runs for signed-in people only.')
  return context.actor.person
}

/** The organisation or draw that the rule was decided on. Only for handlers whose rule names one. */
export function resourceOf(context: CallContext): Resource {
  if (!context.resource) throw new Error('This handler runs on an organisation or a draw only.')
  return context.resource
}
