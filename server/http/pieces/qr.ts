import { create } from 'qrcode'

/** Light modules around the code (ISO/IEC 18004: four). */
const QUIET = 4

/**
 * A QR code (ISO/IEC 18004, error correction M: 15 %) as an SVG with a name. Always dark on white, whatever the page around
 * it: readers need it so.
 */
export function qrSvg(text: string, title: string): string {
  const { side, path } = qrShape(text)
  return `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${side} ${side}" width="${side * 8}" height="${side * 8}" role="img" aria-label="${title}" shape-rendering="crispEdges"><title>${title}</title><path fill="#fff" d="M0 0h${side}v${side}H0z"/><path fill="#000" d="${path}"/></svg>\n`
}

/** A QR code's dark modules as one path, in a square of `side` units with its quiet zone. */
export function qrShape(text: string): { readonly side: number; readonly path: string } {
  const { modules } = create(text, { errorCorrectionLevel: 'M' })
  const side = modules.size + 2 * QUIET
  let path = ''
  for (let y = 0; y < modules.size; y += 1) {
    for (let x = 0; x < modules.size; x += 1) {
      if (!modules.get(y, x)) continue
      let width = 1
      while (x + width < modules.size && modules.get(y, x + width)) width += 1
      path += `M${x + QUIET} ${y + QUIET}h${width}v1h-${width}z`
      x += width
    }
  }
  return { side, path }
}
