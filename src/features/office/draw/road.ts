import type { OfficeDraw } from '#shared/schemas/api/office.ts'

/** One step of a draw's work and how far it is. */
export interface Stage {
  readonly step: 'terms' | 'prizes' | 'entrants' | 'seal' | ''
  readonly title: string
  readonly mark: 'done' | 'now' | 'ahead'
}

/** The steps of a draw in their order. At most one is `now`: the first that is not done. */
export function roadOf(draw: Pick<OfficeDraw, 'state' | 'prizes' | 'counts'>): readonly Stage[] {
  const published = draw.state !== 'draft'
  const listed = draw.state !== 'draft' && draw.state !== 'open'
  const sealed = listed && draw.state !== 'closed' && draw.state !== 'cancelled'
  const drawn = draw.state === 'drawn' || draw.state === 'concluded'
  const stages: readonly (readonly [Stage['step'], string, boolean])[] = [
    ['terms', 'Terms', published],
    ['prizes', 'Prizes', published && draw.prizes.length > 0],
    ['entrants', 'Entrants', listed && draw.counts.entrants > 0],
    ['seal', 'Seal', sealed],
    ['', 'Draw and mails', drawn],
  ]
  const first = draw.state === 'cancelled' || draw.state === 'failed' ? -1 : stages.findIndex(([, , done]) => !done)
  return stages.map(([step, title, done], index) => ({
    step,
    title,
    mark: done ? 'done' : index === first ? 'now' : 'ahead',
  }))
}
