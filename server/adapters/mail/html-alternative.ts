import { linkedHtml } from '#shared/text/links.ts'

/** The same words as the plain text, set in paper and ink: paragraphs at empty lines, links live, nothing loaded. */
export function htmlAlternative(text: string): string {
  const paragraphs = text
    .trim()
    .split(/\n\s*\n/)
    .map((paragraph) => `<p style="margin:0 0 14px">${linkedHtml(paragraph).replaceAll('\n', '<br>')}</p>`)
  return `<!doctype html><html lang="en"><body style="margin:0;padding:28px;background:#FAFAF6;color:#18211F;font:18px/28px 'Atkinson Hyperlegible Next',Verdana,sans-serif"><div style="max-width:37em">${paragraphs.join('')}</div></body></html>`
}
