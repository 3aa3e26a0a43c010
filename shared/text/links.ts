/** A piece of plain text: an http or https address, or the words between two. */
export interface TextPiece {
  readonly kind: 'words' | 'link'
  readonly text: string
}

/**
 * Splits plain text at its http and https addresses. Marks that close a sentence or a bracket right behind an address
 * belong to the words. The pieces together are the text.
 */
export function splitLinks(text: string): readonly TextPiece[] {
  const pieces: TextPiece[] = []
  let end = 0
  for (const match of text.matchAll(/https?:\/\/[^\s<>"']+/g)) {
    const address = match[0].replace(/[.,;:!?)\]]+$/, '')
    if (match.index > end) pieces.push({ kind: 'words', text: text.slice(end, match.index) })
    pieces.push({ kind: 'link', text: address })
    end = match.index + address.length
  }
  if (end < text.length) pieces.push({ kind: 'words', text: text.slice(end) })
  return pieces
}

const ESCAPES: Readonly<Record<string, string>> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
}

/** Text made safe as HTML content and inside a quoted attribute. */
export function escapeHtml(text: string): string {
  return text.replace(/[&<>"']/g, (character) => ESCAPES[character] ?? character)
}

/** Plain text as HTML with live addresses; line feeds stay as they are. */
export function linkedHtml(text: string): string {
  return splitLinks(text)
    .map((piece) => {
      const safe = escapeHtml(piece.text)
      return piece.kind === 'link' ? `<a href="${safe}">${safe}</a>` : safe
    })
    .join('')
}
