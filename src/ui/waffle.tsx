import { formatNumber } from './format-number.ts'

const ACROSS = 14
const STEP = 14

/** All tickets as rings, some of them filled: a chance to scale. For a few hundred tickets at most. */
export function Waffle({ filled, total }: { readonly filled: number; readonly total: number }) {
  const rows = Math.ceil(total / ACROSS)
  return (
    <svg
      className="waffle"
      viewBox={`0 0 ${ACROSS * STEP} ${rows * STEP}`}
      role="img"
      aria-label={`${formatNumber(filled)} of ${formatNumber(total)} tickets filled`}
    >
      {Array.from({ length: total }, (_, index) => (
        <circle
          key={index}
          className={index < filled ? 'dot-in' : 'dot-out'}
          cx={(index % ACROSS) * STEP + STEP / 2}
          cy={(rows - 1 - Math.floor(index / ACROSS)) * STEP + STEP / 2}
          r={index < filled ? 5.2 : 4.5}
        />
      ))}
    </svg>
  )
}
