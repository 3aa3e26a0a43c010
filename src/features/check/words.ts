import { capitalise, countOf } from '#src/ui/format-number.ts'
import type { Phase, StepState } from './check-state.ts'

/** What each step does, for people; the exact figures stand below it. A step that is new here has only its title. */
const STEP_WORDS: Readonly<Record<number, string>> = {
  1: 'Every file in the archive is unpacked and compared with the digest that the archive states for it. Anything doubled, hidden or damaged is refused.',
  2: 'The seal and the result are signed. Both signatures must be by the key in the archive, and by the key whose fingerprint you gave.',
  3: 'The seal holds what was promised before the draw: prizes, rule, times, sources of chance. It must be complete and allow one reading only, and the terms must be those that it names.',
  4: 'Every entrant’s tickets are read and hashed into one root. It must be the sealed one: then nobody was added, left out or changed since.',
  5: 'The result must belong to this very seal, and be no earlier than the time of the draw.',
  6: 'The secret that was opened at the draw must be the one that was promised in the seal.',
  7: 'The round of the public beacon must be the one that the seal names, and bear the beacon’s own signature.',
  8: 'The tosses that people made must be as many and as long as the seal asks for, and none too many.',
  9: 'Every coin is weighed again from its flips, in order. It must fall as the record says, and lead to the entrant who was announced.',
  10: 'The words that announce the winners must be the ones that were sealed for their places in the list.',
  11: 'The record of all coins must be the one that was signed with the result.',
  12: 'Whatever else lies in the archive is examined, or named where this check does not read it. Receipts are held against the seal one by one.',
}

export function stepWords(step: number): string {
  return STEP_WORDS[step] ?? ''
}

const STATE_WORDS: Readonly<Record<StepState, string>> = {
  waiting: 'Waiting',
  running: 'Under way',
  holds: 'Holds',
  fails: 'Fails',
  left: 'Not reached',
}

export function stateWords(state: StepState): string {
  return STATE_WORDS[state]
}

/** What a screen reader hears when the check has come to an end. */
export function phaseWords(phase: Phase, failedStep: number | null): string {
  switch (phase) {
    case 'ready':
      return ''
    case 'running':
      return 'The check is under way.'
    case 'held':
      return 'The check is done. The arithmetic holds.'
    case 'failed':
      return failedStep === null ? 'The check is done. It fails.' : `The check is done. Step ${failedStep} fails.`
    case 'stopped':
      return 'The check broke off without a verdict.'
    case 'cancelled':
      return 'You stopped the check. There is no verdict.'
  }
}

/**
 * A sentence of the verdict as a heading and the rest: "The arithmetic holds" and why; "Sealed in time: shown" and by
 * whom, or "not shown" and what would show it. A sentence of another make is all rest.
 */
export function headAndRest(sentence: string): { readonly head: string | null; readonly rest: string } {
  const match =
    /^(Sealed in time: (?:not )?shown)[.:]? (.*)$/s.exec(sentence) ?? /^(The arithmetic holds): (.*)$/s.exec(sentence)
  if (!match) return { head: null, rest: sentence }
  const [, head = '', rest = ''] = match
  return { head, rest: capitalise(rest) }
}

/** How long it took: in milliseconds below a second, to a tenth of a second below ten. */
export function durationWords(milliseconds: number): string {
  const whole = Math.round(milliseconds)
  if (whole < 1) return 'less than a millisecond'
  if (whole < 1000) return countOf(whole, 'millisecond')
  const tenths = Math.round(milliseconds / 100) / 10
  return countOf(tenths < 10 ? tenths : Math.round(tenths), 'second')
}

/** Control characters, and marks that turn the direction of writing, made visible: the archive chose them. */
export function printable(text: string): string {
  return text.replace(/[\p{Cc}\p{Bidi_Control}]/gu, '\uFFFD')
}
