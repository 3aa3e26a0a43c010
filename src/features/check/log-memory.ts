import { LOG_MEMORY } from '#src/lib/log-memory.ts'

/** Null where nothing is remembered, or where the browser keeps nothing for this site. */
export function rememberedHead(): string | null {
  try {
    return localStorage.getItem(LOG_MEMORY)
  } catch {
    return null
  }
}

export function rememberHead(note: string): void {
  try {
    localStorage.setItem(LOG_MEMORY, note)
  } catch {
    // A private window, or storage that is full: the next check then compares with the archive only.
  }
}
