/** The newest checkpoint of the site's log that this browser has seen and verified, as the signed note. */
const PLACE = 'evenpenny-log-head'

/** Null where nothing is remembered, or where the browser keeps nothing for this site. */
export function rememberedHead(): string | null {
  try {
    return localStorage.getItem(PLACE)
  } catch {
    return null
  }
}

export function rememberHead(note: string): void {
  try {
    localStorage.setItem(PLACE, note)
  } catch {
    // A private window, or storage that is full: the next check then compares with the archive only.
  }
}
