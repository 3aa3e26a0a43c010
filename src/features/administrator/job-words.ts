const WORDS: Record<string, string> = {
  close: 'Close a list whose time has come',
  settle: 'Settle a draw',
  archive: 'Keep a proof archive',
  cosign: 'Have the log cosigned by outside witnesses',
  checkpoint: 'Sign the log and keep its checkpoint',
  seal: 'Seal a long list',
  timestamp: 'Get the timestamp of a seal',
  'prepare-mail': 'Write the mails of a draw',
  'send-mail': 'Send the mails that are due',
}

/** A queue's name in words; an unknown one as it stands, without its hyphens. */
export function jobWords(kind: string): string {
  const words = WORDS[kind] ?? kind.replaceAll('-', ' ')
  return words.charAt(0).toUpperCase() + words.slice(1)
}
