import { useParams } from 'react-router'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { formatNumber } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'
import { drawPath } from '../paths.ts'

/** What goes onto paper: slips for those whom no mail reaches, and the poster. */
export function PaperPart({ draw }: { readonly draw: OfficeDraw }) {
  const organisation = useParams().organisation ?? ''
  if (draw.state === 'draft') return null
  const without = draw.counts.entrants - draw.counts.withEmail
  return (
    <Part title="On paper">
      <p className="measure">
        A slip gives an entrant without e-mail the same private page as the others: a QR code, and a code to type.
        {without > 0 ? ` ${formatNumber(without)} entrants have no e-mail address.` : ''} The poster leads everybody to
        the public page.
      </p>
      <p className="buttons mt-unit">
        <ButtonLink small to={drawPath(organisation, draw.id, 'slips')}>
          Print slips
        </ButtonLink>
        <ButtonLink small quiet to={drawPath(organisation, draw.id, 'poster')}>
          Print the poster
        </ButtonLink>
      </p>
    </Part>
  )
}
