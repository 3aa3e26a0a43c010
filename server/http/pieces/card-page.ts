import type { CardFacts } from '#server/http/pieces/card-facts.ts'
import { ladderHeight, ladderShapes, LOOK } from '#server/http/pieces/card-look.ts'
import { escapeHtml } from '#shared/text/links.ts'

const LADDER = 432

export const PAGE_STYLE = `${LOOK}
html { background: var(--paper); color: var(--ink); font: 16px/1.4 system-ui, sans-serif; }
body { margin: 0; padding: 20px; border: 1px solid var(--rule); min-height: calc(100vh - 42px); overflow-wrap: anywhere; }
h1 { font-size: 1.4rem; line-height: 1.2; margin: 0.15em 0 0.4em; }
p { margin: 0.3em 0; } ul { list-style: none; margin: 0.9em 0; padding: 0; } li { margin: 0.5em 0; }
a { color: inherit; } b { display: block; font-size: 1.05em; } svg { display: block; width: 100%; height: auto; max-width: 432px; margin: 1em 0 0.3em; }
.two { color: var(--ink-2); font-size: 0.9em; } code { font-family: ui-monospace, monospace; }
`

/** The card as a small page for a frame in somebody else's: no script, one style, links that leave the frame. */
export function cardPage(facts: CardFacts): string {
  const text = escapeHtml
  const winners = facts.winners.map(
    ({ prize, label }) => `<li><b>${text(label)}</b><span class="two">${text(prize)}</span></li>`,
  )
  if (facts.more > 0) winners.push(`<li class="two">and ${facts.more.toLocaleString('en-GB')} more</li>`)
  const walk = facts.walk
    ? `<svg viewBox="0 0 ${LADDER} ${ladderHeight(facts.walk)}" role="img" aria-label="Small ladder of the walk to the first prize">${ladderShapes(facts.walk, LADDER)}</svg><p class="two">The coins that led to the first prize</p>`
    : ''
  return `<!doctype html>
<html lang="en-GB">
<head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="robots" content="noindex"><title>${text(facts.title)} · Evenpenny</title>
<link rel="canonical" href="${text(facts.page)}"><style>${PAGE_STYLE}</style></head>
<body><main>
${facts.warning ? `<p><strong>${text(facts.warning)}</strong></p>` : ''}
<p class="two">${text(facts.organisation)}</p>
<h1>${text(facts.title)}</h1>
<p>${text(facts.state)}</p>
${facts.list ? `<p class="two">${text(facts.list)}</p>` : ''}
${winners.length > 0 ? `<ul>${winners.join('')}</ul>` : ''}
${walk}
${facts.seal ? `<p class="two">Seal <code>${text(facts.seal)}</code></p>` : ''}
<p><a href="${text(facts.page)}" target="_blank" rel="noopener">See the whole draw and check it</a></p>
</main></body>
</html>
`
}
