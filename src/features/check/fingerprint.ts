/** A fingerprint as people type or paste it: digits in groups, either case. Null where nothing was typed. */
export function readFingerprint(text: string): { readonly key: string | null } | { readonly error: string } {
  const digits = text.replace(/[\s:.-]/g, '').toLowerCase()
  if (digits === '') return { key: null }
  if (/^[0-9a-f]{64}$/.test(digits)) return { key: digits }
  if (/[^0-9a-f]/.test(digits)) {
    return { error: 'A fingerprint is written with the digits 0 to 9 and the letters a to f only.' }
  }
  return { error: `A fingerprint has 64 digits, and this one has ${digits.length}. Type all of them, or none.` }
}
