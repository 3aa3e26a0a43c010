import { Fragment } from 'react'
import { coinShape, type LadderCoin } from '#shared/sampling/ladder-shape.ts'

/** The chances of a walk's coins, multiplied out to tickets over tickets. */
export function ChanceProduct({
  coins,
  ticketsIn,
  remaining,
}: {
  readonly coins: readonly LadderCoin[]
  readonly ticketsIn: number
  readonly remaining: number
}) {
  return (
    <p className="product">
      {coins.map((coin, index) => {
        const shape = coinShape(coin)
        return (
          <Fragment key={index}>
            {index > 0 ? <em>×</em> : null}
            <Fraction over={shape.chosen} under={shape.total} />
          </Fragment>
        )
      })}
      {coins.length > 0 ? <em>=</em> : null}
      <b>
        <Fraction over={ticketsIn} under={remaining} />
      </b>
    </p>
  )
}

function Fraction({ over, under }: { readonly over: number; readonly under: number }) {
  return (
    <span>
      {over}
      <i>/</i>
      {under}
    </span>
  )
}
