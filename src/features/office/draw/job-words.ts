import type { OfficeDraw } from '#shared/schemas/api/office.ts'

export const JOB_STATES: Record<OfficeDraw['jobs'][number]['state'], string> = {
  waiting: 'waits',
  running: 'is running',
  done: 'is done',
  failed: 'has failed',
  cancelled: 'was called off',
}

const TITLES: Record<string, string> = {
  settle: 'Settling the draw',
  archive: 'Keeping the proof archive',
  seal: 'Sealing the list',
  timestamp: 'Getting the seal’s timestamp',
  close: 'Closing the list',
  'prepare-mail': 'Writing the mails',
  'send-mail': 'Sending the mails',
}

/** A job's name in words; an unknown one as it stands, without its hyphens. */
export function jobTitle(kind: string): string {
  const words = TITLES[kind] ?? kind.replaceAll('-', ' ')
  return words.charAt(0).toUpperCase() + words.slice(1)
}
