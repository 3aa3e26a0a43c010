import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { formatMoment } from '#src/ui/format-time.ts'
import { Part } from '#src/ui/page.tsx'
import { isBeingSealed } from './sealing.ts'
import { drawPath, type Step } from '../paths.ts'
import { useRole } from '../use-role.ts'

interface Next {
  readonly words: string
  readonly to?: Step
  readonly action?: string
}

/** The one thing to do now, by the draw's state and what it still lacks. */
export function nextOf(draw: OfficeDraw): Next {
  const drawn = formatMoment(draw.drawAt, draw.timeZone)
  switch (draw.state) {
    case 'draft':
      if (draw.prizes.length === 0)
        return { words: 'The draw has no prize yet.', to: 'prizes', action: 'Set the prizes' }
      return {
        words: 'Read the terms once more, then open the draw for entries.',
        to: 'terms',
        action: 'Go to the terms',
      }
    case 'open':
      if (draw.counts.entrants === 0) {
        return {
          words: 'The list is empty. Bring in a sheet, or add entrants by hand.',
          to: 'import',
          action: 'Bring in a sheet',
        }
      }
      return {
        words: `The list closes by itself ${formatMoment(draw.closesAt, draw.timeZone)}. Until then entrants can be added and put right.`,
        to: 'entrants',
        action: 'Look through the list',
      }
    case 'closed':
      if (isBeingSealed(draw)) {
        return {
          words: 'The list is being sealed. There is nothing to do meanwhile.',
          to: 'seal',
          action: 'See how far it is',
        }
      }
      return { words: 'The list is closed. Look through it, then seal it.', to: 'seal', action: 'Go to the seal' }
    case 'sealed':
      return {
        words: `Nothing is left to do until the draw. It is settled by itself ${drawn}; nobody has to press anything.`,
      }
    case 'drawn':
      return { words: 'The draw is settled. Tell the winners who have no e-mail address, and hand over the prizes.' }
    case 'concluded':
      return { words: 'Every prize is claimed or passed on.' }
    case 'cancelled':
      return { words: 'The draw is cancelled. Give back what was paid for tickets, as your terms say.' }
    case 'failed':
      return { words: 'The randomness that the seal named could not be had. A new draw can be made and say so.' }
  }
}

export function NextStep({ draw }: { readonly draw: OfficeDraw }) {
  const role = useRole()
  const next = nextOf(draw)
  if (role === 'witness') return null
  return (
    <Part title="Next">
      <p className="measure">{next.words}</p>
      {next.to !== undefined && next.action ? (
        <p className="buttons mt-unit-2">
          <ButtonLink to={drawPath(draw.organisation.slug, draw.id, next.to)}>{next.action}</ButtonLink>
        </p>
      ) : null}
    </Part>
  )
}
