import type { LadderCoin } from '#shared/sampling/ladder-shape.ts'
import { weigh } from './geometry.ts'

const fractionLength = ([left, right]: LadderCoin) => `${left}/${left + right}`.length

/** Whether a weighing needs the panel's whole width: many flips or large numbers. */
export function isLong(coin: LadderCoin): boolean {
  return Math.max(148, (fractionLength(coin) + 5) * 11.6) + coin[2].length * 40 > 400
}

/** Digits shown after the last flip: as many as the line has room for. */
function restDigits(coin: LadderCoin): number {
  const flips = coin[2].length
  if (flips > 8) return 0
  return flips <= 4 || isLong(coin) ? 4 : 7 - flips
}

const SIGN = { equal: '=', heads: '<', tails: '>' } as const

/** The flips held against the binary digits of the chance, column by column, the deciding one ringed. */
export function Weighing({ coin }: { readonly coin: LadderCoin }) {
  const [left, right] = coin
  const flips = coin[2].length
  const { rungs, rest, goesOn } = weigh(coin, restDigits(coin))
  // Long fractions take a line of their own on phones; many flips leave no room for digits still to come.
  const classes = ['weigh', fractionLength(coin) > 9 && 'deep', flips > 3 && 'many'].filter(Boolean).join(' ')
  return (
    <div className={classes} aria-hidden="true">
      <span className="lab">
        <span>Flips</span>
        <span />
        <span className="chance">
          <span className="fraction">
            {left}/{left + right} =
          </span>{' '}
          0.
        </span>
      </span>
      <span className="rungs">
        {rungs.map((rung, index) => {
          // Equal with no digit left is tails too; its sign stays the equals sign.
          const sign = rung.flip === rung.digit ? '=' : SIGN[rung.outcome]
          return (
            <span key={index} className={`rung${rung.outcome === 'equal' ? '' : ` decides ${rung.outcome}`}`}>
              <Flip flip={rung.flip} />
              <span className="sign" data-sign={sign}>
                {sign}
              </span>
              <span className="digit">{rung.digit}</span>
            </span>
          )
        })}
        {rest ? (
          <span className="rest">
            <span>{rest}</span>
            {goesOn ? '…' : ''}
          </span>
        ) : null}
      </span>
    </div>
  )
}

/** A fair flip: a filled disc for 1, an open one for 0, always with its figure. */
export function Flip({ flip }: { readonly flip: 0 | 1 }) {
  return <span className={flip === 1 ? 'flip one' : 'flip nought'}>{flip}</span>
}
