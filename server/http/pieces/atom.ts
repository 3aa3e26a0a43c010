import { xmlText } from '#server/http/pieces/xml-text.ts'
import type { FeedEntry, FeedFacts } from '#server/store/queries/feed.ts'
import { eventMeaning, eventTitle } from '#shared/log/event-words.ts'

/** An organisation's feed (RFC 4287). Ids are tag URIs (RFC 4151), so that they outlive a change of addresses. */
export function atomFeed(facts: FeedFacts, origin: string): string {
  const host = new URL(origin).hostname
  const page = `${origin}/organisations/${facts.slug}`
  const updated = facts.entries[0]?.at ?? facts.createdAt
  return `<?xml version="1.0" encoding="utf-8"?>
<feed xmlns="http://www.w3.org/2005/Atom" xml:lang="en-GB">
<id>tag:${host},${day(facts.createdAt)}:organisations/${facts.slug}</id>
<title>${xmlText(`Draws of ${facts.name}`)}</title>
<updated>${updated}</updated>
<author><name>${xmlText(facts.name)}</name></author>
<link rel="self" type="application/atom+xml" href="${page}/feed.atom"/>
<link rel="alternate" type="text/html" href="${page}"/>
${facts.entries.map((entry) => entryOf(entry, origin, host)).join('')}</feed>
`
}

function entryOf(entry: FeedEntry, origin: string, host: string): string {
  const note = entry.note ? ` “${entry.note}”` : ''
  return `<entry>
<id>tag:${host},${day(entry.at)}:log/${entry.index}</id>
<title>${xmlText(`${eventTitle(entry)}: ${entry.draw.title}`)}</title>
<updated>${entry.at}</updated>
<published>${entry.at}</published>
<link rel="alternate" type="text/html" href="${origin}/draws/${entry.draw.slug}"/>
<category term="${xmlText(entry.event)}"/>
<content type="text">${xmlText(`${eventMeaning(entry)}${note}`)}</content>
</entry>
`
}

const day = (instant: string) => instant.slice(0, 10)
