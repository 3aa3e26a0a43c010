/**
 * The words that announce an entrant who chose none: the first word of the name and the initial of its last,
 * `Marta Quillon` → `Marta Q.`; a name of one word stands as it is, and `Quillon, Marta` is read the other way round. It
 * says little on purpose: whoever wants the whole name announced writes it in the label column.
 */
export function defaultLabel(name: string): string {
  const [first = '', last = ''] = firstAndLast(name)
  const initial = /^[^\p{L}\p{N}]*([\p{L}\p{N}]\p{M}*)/u.exec(last)?.[1]
  return initial === undefined ? first : `${first} ${initial}.`
}

/** The first and the last word of a name, or its only one; `Quillon, Marta` is read the other way round. */
export function firstAndLast(name: string): readonly string[] {
  const comma = /^([^,]+),\s*(\S.*)$/.exec(name)
  const words = (comma ? `${comma[2]} ${comma[1]}` : name).split(/\s+/).filter((word) => word !== '')
  return words.length > 1 ? [words[0] ?? '', words[words.length - 1] ?? ''] : words
}
