import { useQuery } from '@tanstack/react-query'
import type { StatisticsView } from '#shared/schemas/api/statistics.ts'
import { useApp } from '#src/lib/app-context.ts'
import { perCent } from '#src/ui/chance-words.ts'
import { countOf } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Part } from '#src/ui/page.tsx'
import { statisticsQuery } from './api/get-statistics.ts'

/** With fewer picks only a gross lean would show. */
const FEW_PICKS = 1000
/** Rarer than this is called out. */
const FLAGGED = 0.001

/** Whether the place in the list mattered, over all draws that the site has made. */
export function OrderPart() {
  const { api } = useApp()
  const { data } = useQuery(statisticsQuery(api))
  if (!data) return null
  return (
    <Part title="Does the place in the list matter?" note={<p>Over the draws of this site</p>} id="order">
      <div className="measure">
        <p>
          It must not. In 1970 a conscription draw in the United States was badly mixed: capsules that went in last came
          out first. The same test that shows it there is made here over all draws of this site: how far down the list,
          counted in tickets, did each pick fall? On average it has to be half way.
        </p>
        <Found statistics={data} />
      </div>
    </Part>
  )
}

function Found({ statistics: { at, draws, picks, order } }: { readonly statistics: StatisticsView }) {
  if (!order) return <p>No draw of this site has been drawn yet.</p>
  return (
    <>
      <p>
        {countOf(draws, 'draw')} with {countOf(picks, 'pick')}: on average {perCent(order.mean)} of the way down. Chance
        alone strays as far or farther {timesWords(order.p)} (z = {signed(order.z)}, p = {order.p.toFixed(4)}).{' '}
        {order.p < FLAGGED
          ? 'That is seldom. It does not show why, but whoever runs this site has to look into it.'
          : 'That is nothing out of the ordinary.'}
      </p>
      {picks < FEW_PICKS ? (
        <p>
          With so few picks only a gross lean could show. That nothing shows is no proof; the check of each draw is what
          proves it.
        </p>
      ) : null}
      <p className="note">As of {formatMoment(at, 'UTC')} UTC.</p>
    </>
  )
}

/** How often, in words: "in 62 of 100 cases", "less than once in 1,000". */
export function timesWords(p: number): string {
  if (p < 0.001) return 'less than once in 1,000 cases'
  if (p < 0.095) return `about once in ${Math.round(1 / p)} cases`
  return `in about ${Math.round(p * 100)} of 100 cases`
}

const signed = (value: number) => value.toFixed(2).replace('-', '−')
