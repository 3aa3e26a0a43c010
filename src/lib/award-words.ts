import type { Award } from '#shared/schemas/api/public.ts'
import { capitalise, formatNumber, ordinal } from '#src/ui/format-number.ts'

/** "First prize", "Third prize, 1 of 3", "Reserve 2". */
export function awardWords(award: Award): string {
  if (award.kind === 'reserve') return `Reserve ${award.reserve}`
  const which = `${capitalise(ordinal(award.position))} prize`
  return award.of > 1 ? `${which}, ${formatNumber(award.item)} of ${formatNumber(award.of)}` : which
}

/** The same inside a sentence: "the first prize", "the place of reserve 2". */
export function awardInSentence(award: Award): string {
  if (award.kind === 'reserve') return `the place of reserve ${award.reserve}`
  return `the ${ordinal(award.position)} prize${award.of > 1 ? `, ${formatNumber(award.item)} of ${formatNumber(award.of)}` : ''}`
}
