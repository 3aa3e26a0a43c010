import { hasLoneSurrogate } from './bytes.ts'

/** What makes a text unfit for the record (PROTOCOL "Writing"). */
export type TextProblem = 'lone-surrogate' | 'control-character' | 'line-separator' | 'bidirectional-control'

const CONTROL = /[\u0000-\u001f\u007f-\u009f]/
const CONTROL_BUT_LINE_FEED = /[\u0000-\u0009\u000b-\u001f\u007f-\u009f]/
// One question that settles almost every text: nothing that any of the rules could be about.
const SUSPECT = /[\u0000-\u001f\u007f-\u009f\u061c\u200e\u200f\u2028-\u202e\u2066-\u2069\ud800-\udfff]/
const LINE_SEPARATOR = /[\u2028\u2029]/
// The Unicode property Bidi_Control (UAX #9).
const BIDI = /[\u061c\u200e\u200f\u202a-\u202e\u2066-\u2069]/

/** A plain sentence for each problem, to be put after the name of the field. */
export const TEXT_PROBLEMS: Readonly<Record<TextProblem, string>> = {
  'lone-surrogate': 'holds half of a character (a lone surrogate)',
  'control-character': 'holds a control character',
  'line-separator': 'holds a line or paragraph separator',
  'bidirectional-control': 'holds a character that changes the direction of writing',
}

/** The first thing in a one-line text that the record refuses, or null. Does not look at the normal form. */
export function textProblem(text: string): TextProblem | null {
  if (!SUSPECT.test(text)) return null
  if (CONTROL.test(text)) return 'control-character'
  return otherProblem(text)
}

/** As `textProblem` for `terms.txt`: line feeds are allowed. Its end is checked by `isTermsText`. */
export function multilineProblem(text: string): TextProblem | null {
  if (CONTROL_BUT_LINE_FEED.test(text)) return 'control-character'
  return otherProblem(text)
}

/** Whether a text can stand as `terms.txt`: allowed characters, and exactly one line feed at the end. */
export function isTermsText(text: string): boolean {
  return multilineProblem(text) === null && text.endsWith('\n') && !text.endsWith('\n\n')
}

/**
 * Brings a text to NFC, once, at import. A check never calls this: it hashes the string as it stands, because which
 * strings are in normal form can differ between versions of Unicode.
 */
export function importText(text: string): string {
  return text.normalize('NFC')
}

/** Terms as they will be published: NFC, line feeds only, exactly one at the end. Characters are not checked here. */
export function importTerms(text: string): string {
  const lines = importText(text).replace(/\r\n?/g, '\n')
  return `${lines.replace(/\n+$/, '')}\n`
}

function otherProblem(text: string): TextProblem | null {
  if (LINE_SEPARATOR.test(text)) return 'line-separator'
  if (BIDI.test(text)) return 'bidirectional-control'
  return hasLoneSurrogate(text) ? 'lone-surrogate' : null
}
