import { escapeHtml } from '#shared/text/links.ts'

/** Text made safe inside XML 1.0 elements and attributes; what XML cannot hold at all (section 2.2) is left out. */
export function xmlText(text: string): string {
  return escapeHtml(text.replace(/[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\u{10000}-\u{10ffff}]/gu, ''))
}
