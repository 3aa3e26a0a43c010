interface SealEdgeProps {
  /** 64 hexadecimal digits. */
  readonly digest: string
  /** Two short lines in the middle. */
  readonly lines?: readonly [string, string]
  readonly large?: boolean
}

const CENTRE = 110
const RIM = 99

/** End points of the 64 reeds, clockwise from the top; each is 5 + 1.75 × its hexadecimal digit long. */
export function reeds(digest: string): readonly { x1: number; y1: number; x2: number; y2: number }[] {
  return Array.from(digest.slice(0, 64), (digit, index) => {
    const angle = ((index + 0.5) / 64) * 2 * Math.PI - Math.PI / 2
    const inner = RIM - (5 + 1.75 * Number.parseInt(digit, 16))
    const at = (radius: number, along: number) => Math.round((CENTRE + radius * along) * 100) / 100
    return {
      x1: at(RIM, Math.cos(angle)),
      y1: at(RIM, Math.sin(angle)),
      x2: at(inner, Math.cos(angle)),
      y2: at(inner, Math.sin(angle)),
    }
  })
}

/** The seal's digest as a reeded coin edge: a help to the eye, not a check. */
export function SealEdge({ digest, lines, large = false }: SealEdgeProps) {
  const path = reeds(digest)
    .map((reed) => `M${reed.x1} ${reed.y1}L${reed.x2} ${reed.y2}`)
    .join('')
  const size = large ? 19 : 17
  return (
    <svg
      className={large ? 'seal-edge large' : 'seal-edge'}
      viewBox="0 0 220 220"
      role="img"
      aria-label={`Reeded edge of the seal ${digest.slice(0, 8)}: sixty-four reeds, one for each digit of its digest`}
    >
      <circle cx="110" cy="110" r="105" fill="none" stroke="currentColor" strokeWidth="2.5" />
      <path d={path} stroke="currentColor" strokeWidth="4.4" fill="none" />
      {lines ? (
        <g textAnchor="middle" fill="currentColor" fontSize={size}>
          <text x="110" y="106">
            {lines[0]}
          </text>
          <text x="110" y="129">
            {lines[1]}
          </text>
        </g>
      ) : null}
    </svg>
  )
}
