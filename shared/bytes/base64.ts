const ALPHABET = 'ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/'

/** Base64 with padding (RFC 4648 section 4), on one line. */
export function toBase64(bytes: Uint8Array): string {
  let text = ''
  for (let i = 0; i < bytes.length; i += 3) {
    const chunk = ((bytes[i] as number) << 16) | ((bytes[i + 1] ?? 0) << 8) | (bytes[i + 2] ?? 0)
    text += `${ALPHABET[chunk >> 18]}${ALPHABET[(chunk >> 12) & 63]}`
    text += i + 1 < bytes.length ? ALPHABET[(chunk >> 6) & 63] : '='
    text += i + 2 < bytes.length ? ALPHABET[chunk & 63] : '='
  }
  return text
}

/**
 * Bytes from padded base64 (RFC 4648 section 4), or null. Strict: no white space, no missing padding, and unused bits
 * must be zero (section 3.5), so that every byte string has exactly one spelling.
 */
export function fromBase64(text: string): Uint8Array | null {
  if (!/^(?:[A-Za-z0-9+/]{4})*(?:[A-Za-z0-9+/]{2}==|[A-Za-z0-9+/]{3}=)?$/.test(text)) return null
  const padding = text.endsWith('==') ? 2 : text.endsWith('=') ? 1 : 0
  const bytes = new Uint8Array((text.length / 4) * 3 - padding)
  for (let i = 0, o = 0; i < text.length; i += 4, o += 3) {
    let chunk = 0
    for (let j = 0; j < 4; j += 1) chunk = (chunk << 6) | Math.max(0, ALPHABET.indexOf(text.charAt(i + j)))
    for (let j = 0; j < 3 && o + j < bytes.length; j += 1) bytes[o + j] = (chunk >> (16 - 8 * j)) & 0xff
  }
  return toBase64(bytes) === text ? bytes : null
}
