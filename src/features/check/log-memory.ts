import { LOG_MEMORY } from '#src/lib/log-memory.ts'

/** Null where nothing is remembered, or where the browser keeps nothing for this site. */
export function rememberedHead(): string | null {
  try {
    return localStorage.getItem(LOG_MEMORY)
  } catch {
    return null
  }
}

/** Another tab may have come further meanwhile: a shorter log never takes the place of a longer one. */
export function rememberHead(note: string): void {
  const kept = rememberedHead()
  if (kept !== null && originOf(kept) === originOf(note) && sizeOf(kept) >= sizeOf(note)) return
  try {
    localStorage.setItem(LOG_MEMORY, note)
  } catch {
    // A private window, or storage that is full: the next check then compares with the archive only.
  }
}

const originOf = (note: string) => note.split('\n')[0]
const sizeOf = (note: string) => Number(note.split('\n')[1])
