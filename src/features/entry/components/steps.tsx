import type { EntryPick } from '#shared/schemas/api/entry.ts'

const WIDTH = 22
const GAP = 4
const HEIGHT = 14
/** More coins than this are drawn narrower: a list of a million has twenty. */
const ROOMY = 8

/** The coins of a walk in a row: filled while they kept the entrant in, half-filled where it turned away. */
export function Steps({ pick }: { readonly pick: EntryPick }) {
  if (pick.mine === 0 || pick.coins === 0) return null
  const width = pick.coins > ROOMY ? 10 : WIDTH
  const gap = pick.coins > ROOMY ? 2 : GAP
  const kept = pick.turnedAt === null ? pick.coins : pick.turnedAt - 1
  return (
    <svg
      className="steps"
      width={pick.coins * (width + gap)}
      height={HEIGHT}
      viewBox={`0 0 ${pick.coins * (width + gap)} ${HEIGHT}`}
      aria-hidden="true"
    >
      {Array.from({ length: pick.coins }, (_, index) => {
        const x = index * (width + gap)
        const away = index + 1 === pick.turnedAt
        return (
          <g key={index} className={index < kept ? 'in' : away ? 'away' : undefined}>
            <rect x={x + 0.75} y="0.75" width={width - 1.5} height={HEIGHT - 1.5} />
            {away ? <rect className="half" x={x} y="0" width={width / 2} height={HEIGHT} /> : null}
          </g>
        )
      })}
    </svg>
  )
}
