import type { PickedAward } from './mail-facts.ts'
import type { AccountMail } from '#server/commands/account-mail.ts'
import { localWords } from '#server/time/local-time.ts'
import { dateOf } from '#server/time/instants.ts'

/** Words of mails. Plain text; the mailer sets the same words in HTML. */
export interface Words {
  readonly subject: string
  readonly text: string
}

export interface DrawWords {
  readonly title: string
  readonly organisation: string
  readonly promoterName: string
  readonly promoterAddress: string
  readonly timeZone: string
  readonly drawAt: Date
  /** Address of the draw's page. */
  readonly page: string
  readonly demo: boolean
}

export const tickets = (count: number) => (count === 1 ? '1 ticket' : `${count} tickets`)
export const paragraphs = (...parts: readonly (string | null)[]) =>
  `${parts.filter((part) => part !== null).join('\n\n')}\n`
export const sender = (draw: DrawWords) => `${draw.organisation}\n${draw.promoterName}, ${draw.promoterAddress}`
export const demo = (draw: DrawWords) =>
  draw.demo ? 'This is a demonstration. Nobody sold a ticket, and no prize is given.' : null

export function sealWords(
  draw: DrawWords,
  entry: {
    readonly name: string
    readonly tickets: number
    readonly totalTickets: number
    readonly entrants: number
    readonly label: string
    readonly code: string
    readonly sealDigest: string
    readonly replaces: string | null
    readonly reason: string | null
    /** The private page; null once the entrant's details were erased. */
    readonly link: string | null
  },
): Words {
  const renewed =
    entry.replaces === null
      ? null
      : `This seal replaces an earlier one, ${entry.replaces.slice(0, 8)}…, because: ${entry.reason ?? ''}\nA receipt of the earlier seal no longer counts. Keep the one that is attached here.`
  return {
    subject:
      entry.replaces === null ? `Your entry is sealed: ${draw.title}` : `Your entry is sealed anew: ${draw.title}`,
    text: paragraphs(
      `Dear ${entry.name},`,
      `the list of “${draw.title}” is sealed, and you are in it with ${tickets(entry.tickets)} among ${entry.totalTickets} of ${entry.entrants} entrants. If you win, you will be announced as: ${entry.label}`,
      `The draw takes place on ${localWords(draw.drawAt, draw.timeZone)}. Nothing in the list can change until then without everybody seeing it.`,
      renewed,
      `Keep the attached file, receipt.json. It is your private proof that you are in the sealed list; it holds your name, so show it only to people you trust. The seal's digest, all 64 digits, is:\n${entry.sealDigest}`,
      entry.link &&
        `Your private page, which proves the receipt for you and later shows what happened to your tickets:\n${entry.link}`,
      `The draw's page, on which everybody can follow and check it:\n${draw.page}`,
      `Is something wrong? Write to the promoter below, and name your code ${entry.code}.`,
      demo(draw),
      sender(draw),
    ),
  }
}

export function wonWords(
  draw: DrawWords,
  entry: {
    readonly name: string
    readonly code: string
    readonly prizes: readonly PickedAward[]
    readonly link: string | null
  },
): Words {
  const won = entry.prizes.map(({ name, item, of }) => (of === 1 ? name : `${name} (${item} of ${of})`))
  return {
    subject: `You have won a prize: ${draw.title}`,
    text: paragraphs(
      `Dear ${entry.name},`,
      `you have won in “${draw.title}”: ${won.join('; ')}.`,
      `How to claim: the promoter, ${draw.promoterName}, will be in touch with you. You can also write to ${draw.promoterAddress} yourself; name your code ${entry.code}. Nobody who asks you for money to hand over a prize is acting for the promoter.`,
      entry.link && `How the coins came to you, on your private page:\n${entry.link}`,
      `How it was decided, coin by coin, for everybody to check:\n${draw.page}`,
      demo(draw),
      sender(draw),
    ),
  }
}

export function resultWords(
  draw: DrawWords,
  entry: { readonly name: string; readonly tickets: number; readonly link: string | null },
): Words {
  return {
    subject: `The result is out: ${draw.title}`,
    text: paragraphs(
      `Dear ${entry.name},`,
      `“${draw.title}” has been drawn. Your ${tickets(entry.tickets)} did not win a prize this time. Thank you for taking part.`,
      entry.link && `What happened to your tickets at each pick, and how near the coins came:\n${entry.link}`,
      `The winners, and every coin that decided, are on the draw's page:\n${draw.page}`,
      'With the receipt that you got when the list was sealed you can check that your tickets were in.',
      demo(draw),
      sender(draw),
    ),
  }
}

export function noticeWords(
  draw: DrawWords,
  notice: {
    readonly kind: 'postponed' | 'cancelled' | 'failed'
    readonly name: string
    readonly reason: string | null
  },
): Words {
  const reason = notice.reason === null ? null : `The reason given: ${notice.reason}`
  const page = `The draw's page:\n${draw.page}`
  const end = [demo(draw), sender(draw)]
  switch (notice.kind) {
    case 'postponed':
      return {
        subject: `Postponed: ${draw.title}`,
        text: paragraphs(
          `Dear ${notice.name},`,
          `“${draw.title}” was postponed. It now takes place on ${localWords(draw.drawAt, draw.timeZone)}. Your entry stands.`,
          reason,
          page,
          ...end,
        ),
      }
    case 'cancelled':
      return {
        subject: `Cancelled: ${draw.title}`,
        text: paragraphs(
          `Dear ${notice.name},`,
          `“${draw.title}” was cancelled for good: nothing will be drawn. The promoter below will tell you what happens with what you paid.`,
          reason,
          page,
          ...end,
        ),
      }
    case 'failed':
      return {
        subject: `This draw could not be held: ${draw.title}`,
        text: paragraphs(
          `Dear ${notice.name},`,
          `“${draw.title}” could not be drawn and stands as failed. Nothing was drawn, and nobody has won. The promoter below will tell you what happens next.`,
          reason,
          page,
          ...end,
        ),
      }
  }
}

export function accountWords(content: AccountMail): Words {
  const until = localWords(dateOf(content.expiresAt), 'UTC')
  if (content.kind === 'invitation') {
    return {
      subject: `You are invited to ${content.organisation} on Evenpenny`,
      text: paragraphs(
        'Hello,',
        `${content.invitedBy} invites you to ${content.organisation} as ${content.role}. To accept, open this link and choose a password:\n${content.link}`,
        `The link works once, until ${until}. If you did not expect this mail, do nothing: nothing happens without you.`,
      ),
    }
  }
  return {
    subject: 'Set a new password for Evenpenny',
    text: paragraphs(
      `Dear ${content.name},`,
      `to set a new password, open this link:\n${content.link}`,
      `The link works once, until ${until}. If you did not ask for it, do nothing: your password stays as it is.`,
    ),
  }
}
