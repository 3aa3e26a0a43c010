import { stack } from './stack.ts'

/** A mail as the local mail page lists it. */
export interface ArrivedMail {
  readonly number: number
  readonly to: readonly string[]
  readonly subject: string
  readonly messageId: string
  readonly attachments: readonly string[]
  readonly text: string
}

/** The mails that reached an address, newest first. */
export async function mailsTo(address: string): Promise<readonly ArrivedMail[]> {
  const response = await fetch(`${stack().mailPage}/mails.json?to=${encodeURIComponent(address)}`)
  if (!response.ok) throw new Error(`The mail page answered ${response.status}.`)
  return (await response.json()) as readonly ArrivedMail[]
}

/** The bytes of a mail's attachment. */
export async function attachmentOf(mail: ArrivedMail, index: number): Promise<Uint8Array> {
  const response = await fetch(`${stack().mailPage}/mails/${mail.number}/attachments/${index}`)
  if (!response.ok) throw new Error(`The attachment answered ${response.status}.`)
  return new Uint8Array(await response.arrayBuffer())
}
