import { escapeHtml } from '#shared/text/links.ts'

interface Named {
  readonly slug: string
  readonly title: string
  readonly organisation: { readonly name: string }
}

/** HTML for another site: the card in a frame. */
export function cardFrame(origin: string, draw: Named): string {
  return `<iframe src="${origin}/embed/draws/${draw.slug}"\n  title="${nameOf(draw)}"\n  width="480" height="780" loading="lazy"\n  style="border:0;max-width:100%"></iframe>`
}

/** HTML for another site: the card as a picture that leads to the draw. The words beside it hold in every state. */
export function cardPicture(origin: string, draw: Named): string {
  const page = `${origin}/draws/${draw.slug}`
  return `<a href="${page}">\n  <img src="${page}/card.svg"\n    alt="${nameOf(draw)}: where it stands and who won"\n    width="480" style="max-width:100%;height:auto">\n</a>`
}

const nameOf = (draw: Named) => escapeHtml(`${draw.title}, a draw of ${draw.organisation.name}`)
