import type { CardFacts } from '#server/http/pieces/card-facts.ts'
import { ladderHeight, ladderShapes, LOOK } from '#server/http/pieces/card-look.ts'
import { xmlText } from '#server/http/pieces/xml-text.ts'

const WIDTH = 480
const PAD = 24
const INNER = WIDTH - 2 * PAD

export const SVG_STYLE = `${LOOK}
text { font-family: system-ui, sans-serif; fill: var(--ink); }
.two { fill: var(--ink-2); } .strong { font-weight: 700; } .mono { font-family: ui-monospace, monospace; fill: var(--ink-2); }
.paper { fill: var(--paper); stroke: var(--rule); }
`

/** The card as a picture without scripts. Its words stand in it as text, and its name says them all. */
export function cardSvg(facts: CardFacts): string {
  const parts: string[] = []
  let y = PAD
  const write = (text: string, size: number, kind: string, most: number) => {
    // Bold letters are wider by an eighth or so, monospaced ones by less.
    for (const line of wrap(text, INNER / size / (kind === 'strong' ? 1.15 : 1), most)) {
      y += size * 1.3
      const at = `x="${PAD}" y="${round(y - size * 0.25)}" font-size="${size}"`
      parts.push(`<text ${at} class="${kind}">${xmlText(line)}</text>`)
    }
  }
  if (facts.warning) write(facts.warning, 14, 'strong', 2)
  write(facts.organisation, 14, 'two', 1)
  write(facts.title, 24, 'strong', 3)
  y += 4
  write(facts.state, 15, '', 2)
  if (facts.list) write(facts.list, 15, 'two', 1)
  for (const { prize, label } of facts.winners) {
    y += 8
    write(label, 17, 'strong', 1)
    write(prize, 14, 'two', 1)
  }
  if (facts.more > 0) {
    y += 8
    write(`and ${facts.more.toLocaleString('en-GB')} more`, 14, 'two', 1)
  }
  if (facts.walk) {
    y += 18
    parts.push(`<g transform="translate(${PAD} ${round(y)})">${ladderShapes(facts.walk, INNER)}</g>`)
    y += ladderHeight(facts.walk)
    write('The coins that led to the first prize', 12, 'two', 1)
  }
  if (facts.seal) {
    y += 8
    write(`Seal ${facts.seal}`, 13, 'mono', 1)
  }
  const height = Math.ceil(y + PAD)
  return `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${WIDTH} ${height}" width="${WIDTH}" height="${height}" role="img" aria-labelledby="t"><title id="t">${xmlText(words(facts))}</title><style>${SVG_STYLE}</style><rect class="paper" x="0.5" y="0.5" width="${WIDTH - 1}" height="${height - 1}"/>${parts.join('')}</svg>\n`
}

/** All that the card says, as sentences. */
function words(facts: CardFacts): string {
  return [
    facts.warning,
    `${facts.title}, a draw of ${facts.organisation}.`,
    facts.state,
    facts.list ? `${facts.list}.` : null,
    ...facts.winners.map(({ prize, label }) => `${prize}: ${label}.`),
    facts.more > 0 ? `And ${facts.more} more.` : null,
    facts.seal ? `Seal ${facts.seal}.` : null,
  ]
    .filter((part) => part !== null)
    .join(' ')
}

const round = (value: number) => Math.round(value * 10) / 10

/** A letter's width in ems, roughly: nothing here can measure text, so wide scripts and capitals count for more. */
function widthOf(character: string): number {
  if (/[\u1100-\u11ff\u2e80-\u9fff\uac00-\ud7af\uf900-\ufaff\uff00-\uff60\u{1f000}-\u{3ffff}]/u.test(character))
    return 1.05
  if (/[MWmw@%]/.test(character)) return 0.98
  if (/\p{Lu}/u.test(character)) return 0.74
  return /[ilj.,:;'|!() ]/.test(character) ? 0.36 : 0.62
}

const measure = (text: string) => [...text].reduce((sum, character) => sum + widthOf(character), 0)

/** Breaks text into at most `most` lines of `ems`, at spaces where there are any; what is left out is shown by …. */
export function wrap(text: string, ems: number, most: number): string[] {
  const lines: string[] = []
  let line = ''
  for (const word of text.split(/\s+/).filter((each) => each !== '')) {
    const joined = line === '' ? word : `${line} ${word}`
    if (measure(joined) <= ems) {
      line = joined
      continue
    }
    if (line !== '') lines.push(line)
    line = ''
    for (const character of word) {
      if (measure(line + character) > ems) {
        lines.push(line)
        line = ''
      }
      line += character
    }
  }
  if (line !== '') lines.push(line)
  if (lines.length <= most) return lines
  let last = [...(lines[most - 1] ?? '')]
  while (last.length > 0 && measure(`${last.join('')}…`) > ems) last = last.slice(0, -1)
  return [...lines.slice(0, most - 1), `${last.join('').trimEnd()}…`]
}
