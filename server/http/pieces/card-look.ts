import { createHash } from 'node:crypto'
import { miniCoin, miniHeight, miniSize, type LadderCoin } from '#shared/sampling/ladder-shape.ts'

/** Colours and the small ladder, the same on the card and its picture. Values are those of the site's tokens. */
export const LOOK = `
:root { --paper: #fafaf6; --ink: #18211f; --ink-2: #4a5651; --rule: #c9cdc4; --copper: #97430f; --copper-line: #b9683a; --verd: #17685b; --verd-line: #43897c; color-scheme: light dark; }
@media (prefers-color-scheme: dark) { :root { --paper: #141917; --ink: #ecede6; --ink-2: #b3bcb5; --rule: #3b4641; --copper: #eb9862; --copper-line: #b0693f; --verd: #71c6b1; --verd-line: #4b9182; } }
.won.h { fill: var(--copper); } .won.t { fill: var(--verd); }
.lost { fill: none; stroke-width: 1; } .lost.h, .hair.h { stroke: var(--copper-line); } .lost.t, .hair.t { stroke: var(--verd-line); }
.hair { fill: none; stroke-width: 0.6; }
`

export function ladderHeight(coins: readonly LadderCoin[]): number {
  return miniHeight(coins.length)
}

/** A walk as SVG shapes from (0, 0): bars in proportion to tickets, the chosen side opening out. */
export function ladderShapes(coins: readonly LadderCoin[], width: number): string {
  const size = miniSize(coins.length, width)
  const rows = coins.map((coin, index) => {
    const shape = miniCoin(coin, size)
    const [won, lost] = shape.heads ? ['h', 't'] : ['t', 'h']
    const y = 1 + index * (size.bar + size.fan)
    const other = shape.lost
      ? `<rect class="lost ${lost}" x="${shape.lost.x}" y="0.5" width="${shape.lost.width}" height="${size.bar - 1}"/>`
      : ''
    return `<g transform="translate(0 ${y})"><rect class="won ${won}" x="${shape.won.x}" width="${shape.won.width}" height="${size.bar}"/>${other}<path class="hair ${won}" transform="translate(0 ${size.bar})" d="${shape.lines}"/></g>`
  })
  const last = coins.at(-1)?.[3] === 'T' ? 't' : 'h'
  const y = 1 + coins.length * (size.bar + size.fan)
  return `${rows.join('')}<rect class="won ${last}" y="${y}" width="${width}" height="${size.bar}"/>`
}

/** A policy that lets a document use this one style and nothing else (CSP Level 3, hash source). */
export function onlyThisStyle(style: string): string {
  const digest = createHash('sha256').update(style).digest('base64')
  return `default-src 'none'; style-src 'sha256-${digest}'; base-uri 'none'; form-action 'none'`
}
