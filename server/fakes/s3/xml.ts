const namespace = 'http://s3.amazonaws.com/doc/2006-03-01/'

const named: Readonly<Record<string, string>> = { lt: '<', gt: '>', amp: '&', quot: '"', apos: "'" }

/** Text made safe as XML character data. Control characters that XML 1.0 forbids are written as U+FFFD. */
export function escapeXml(text: string): string {
  return text
    .replace(/[\u0000-\u0008\u000B\u000C\u000E-\u001F]/g, '\uFFFD')
    .replace(/[&<>"\r]/g, (c) => ({ '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;' })[c] ?? '&#13;')
}

/** One element: a string content is escaped, a list is taken as ready-made children. */
export function element(name: string, content: string | readonly string[], attributes = ''): string {
  const inner = typeof content === 'string' ? escapeXml(content) : content.join('')
  return `<${name}${attributes}>${inner}</${name}>`
}

/** The root element of a successful answer, in the S3 namespace. */
export const rootElement = (name: string, children: readonly string[]) =>
  xmlDocument(element(name, children, ` xmlns="${namespace}"`))

export const xmlDocument = (root: string) => `<?xml version="1.0" encoding="UTF-8"?>\n${root}`

export interface XmlNode {
  readonly name: string
  readonly text: string
  readonly children: readonly XmlNode[]
}

/**
 * Reads the small documents that S3 clients send: elements and text. Attributes are skipped, namespace prefixes
 * dropped; DOCTYPE, CDATA and processing instructions other than the declaration are refused.
 * @returns undefined if the text is not well-formed.
 */
export function parseXml(source: string): XmlNode | undefined {
  const tokens =
    /<\?xml[^>]*\?>|<(\/?)([A-Za-z_][\w.:-]*)((?:\s+[\w.:-]+\s*=\s*(?:"[^"<]*"|'[^'<]*'))*)\s*(\/?)>|([^<]+)/y
  const root: { name: string; text: string; children: XmlNode[] } = { name: '', text: '', children: [] }
  const open = [root]
  let at = 0
  while (at < source.length) {
    tokens.lastIndex = at
    const token = tokens.exec(source)
    if (!token) return undefined
    at = tokens.lastIndex
    const here = open.at(-1)
    if (!here) return undefined
    const [, closing, qualified, , selfClosing, text] = token
    if (text !== undefined) {
      const decoded = decodeEntities(text)
      if (decoded === undefined) return undefined
      here.text += decoded
    } else if (qualified) {
      const name = qualified.replace(/^.*:/, '')
      if (closing) {
        if (here.name !== name || open.length === 1) return undefined
        open.pop()
      } else {
        const node = { name, text: '', children: [] }
        here.children.push(node)
        if (!selfClosing) open.push(node)
      }
    }
  }
  const [only, ...more] = root.children
  return open.length === 1 && only && more.length === 0 && root.text.trim() === '' ? only : undefined
}

function decodeEntities(text: string): string | undefined {
  let bad = false
  const decoded = text.replace(/&([^;&]{0,12});?/g, (whole, body: string) => {
    const code = /^#x([0-9a-fA-F]+)$/.exec(body)?.[1] ?? undefined
    const decimal = /^#([0-9]+)$/.exec(body)?.[1]
    const point = code ? Number.parseInt(code, 16) : decimal ? Number(decimal) : undefined
    if (whole.endsWith(';') && point !== undefined && point <= 0x10ffff) return String.fromCodePoint(point)
    const known = named[body]
    if (!whole.endsWith(';') || known === undefined) bad = true
    return known ?? ''
  })
  return bad ? undefined : decoded
}

export const childText = (node: XmlNode, name: string): string | undefined =>
  node.children.find((child) => child.name === name)?.text

export const childrenNamed = (node: XmlNode, name: string): readonly XmlNode[] =>
  node.children.filter((child) => child.name === name)
