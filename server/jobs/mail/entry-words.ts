import { localWords } from '#server/time/local-time.ts'
import { demo, type DrawWords, paragraphs, sender, tickets, type Words } from './compose.ts'

interface EntryFacts {
  readonly name: string
  readonly label: string
  readonly tickets: number
  readonly numbers: string | null
  readonly code: string
  readonly link: string
}

const KEEP = 'Keep this mail: whoever has the link can open the page, so pass it on to nobody.'

/** The mail that everybody gets once, when they are brought in; `again`, when they ask for their link. */
export function entryWords(draw: DrawWords, entry: EntryFacts & { readonly again: boolean }): Words {
  const numbers = entry.numbers === null ? '' : ` Your ticket numbers: ${entry.numbers}.`
  return {
    subject: entry.again ? `Your private link: ${draw.title}` : `You are entered: ${draw.title}`,
    text: paragraphs(
      `Dear ${entry.name},`,
      entry.again
        ? `you asked for the private link to your entry in “${draw.title}”, or the promoter had it sent to you. If you did not ask, do nothing.`
        : `you are entered in “${draw.title}” with ${tickets(entry.tickets)}.${numbers} The draw takes place on ${localWords(draw.drawAt, draw.timeZone)}.`,
      `Your private page:\n${entry.link}`,
      'It shows your entry as it stands. There you can ask for a correction and choose how you would be announced; once the list is sealed it holds your receipt, and after the draw it shows what happened to your tickets, coin by coin.',
      KEEP,
      entry.again ? null : `If you win, you will be announced as: ${entry.label}`,
      `Your code for letters and telephone calls is ${entry.code}. The draw's public page, with its terms:\n${draw.page}`,
      demo(draw),
      sender(draw),
    ),
  }
}

/** The answer to a request for a correction. */
export function correctionWords(
  draw: DrawWords,
  entry: EntryFacts & { readonly words: string; readonly verdict: 'done' | 'refused'; readonly answer: string },
): Words {
  return {
    subject: entry.verdict === 'done' ? `Corrected: ${draw.title}` : `Not corrected: ${draw.title}`,
    text: paragraphs(
      `Dear ${entry.name},`,
      `you asked for a correction of your entry in “${draw.title}”:\n${entry.words}`,
      entry.verdict === 'done' ? `It was made. ${entry.answer}` : `It was refused. ${entry.answer}`,
      `Your entry as it stands now, on your private page:\n${entry.link}`,
      demo(draw),
      sender(draw),
    ),
  }
}
