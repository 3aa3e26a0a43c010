import { formatNumber } from '#src/ui/format-number.ts'
import { sumsOf, type SumStep } from '../receipt-proof.ts'

/** A receipt's path as bars: their own side in ink, what stands beside it in outline, the sum at the end. */
export function Sums({ receipt }: { readonly receipt: string }) {
  const steps = sumsOf(receipt)
  if (steps.length === 0) {
    return <p className="measure mt-unit">You are the only entrant, so there is nothing to add.</p>
  }
  return (
    <ol className="sums">
      {steps.map((step, index) => (
        <li key={index}>
          <SumBar step={step} />
          <span className="num">{formatNumber(step.sum)}</span>
        </li>
      ))}
    </ol>
  )
}

/** A side this narrow has no room for its figure; the description beside the bar has it. */
const LEAST_PERCENT = 12

function SumBar({ step: { own, beside, side, sum } }: { readonly step: SumStep }) {
  const [left, right] = side === 'L' ? [beside, own] : [own, beside]
  const percent = (left / sum) * 100
  const parts = [
    { x: 0, width: percent, count: left, mine: side !== 'L' },
    { x: percent, width: 100 - percent, count: right, mine: side === 'L' },
  ]
  return (
    <svg
      className="sum-bar"
      width="100%"
      height="34"
      role="img"
      aria-label={`${formatNumber(left)} and ${formatNumber(right)} make ${formatNumber(sum)}`}
    >
      {parts.map(({ x, width, count, mine }) => (
        <g key={x} className={mine ? 'own' : 'beside'}>
          <rect x={`${x}%`} width={`${width}%`} height="100%" />
          {width < LEAST_PERCENT ? null : (
            <text x={`${x + width / 2}%`} y="50%" dy="0.36em" textAnchor="middle">
              {formatNumber(count)}
            </text>
          )}
        </g>
      ))}
    </svg>
  )
}
