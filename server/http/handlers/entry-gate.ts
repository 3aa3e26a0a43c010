import { readSlipCode } from '#shared/entrants/slip-code.ts'
import { problem } from '#server/http/problems.ts'
import type { EntryGuard } from '#server/http/session/entry-limits.ts'
import type { Services } from '#server/services.ts'
import { type EntryAccess, findEntryAccess, isSlipCode } from '#server/store/queries/entry-access.ts'

const TITLE = 'This link does not work'
/** Longer secrets are no mistyped codes. */
const LONGEST_CODE = 30

/** Finds the entrant behind a private link or a slip's code; the same refusal for everything that fits nobody. */
export type EntryGate = (address: string, secret: string) => Promise<EntryAccess>

export function createEntryGate(services: Services, guard: EntryGuard): EntryGate {
  return async (address, secret) => {
    const code = isSlipCode(secret)
    if (code) await guard.beforeCode(address)
    const found = await findEntryAccess(services, secret)
    if (found) {
      if (code) await guard.afterCode(address)
      return found
    }
    if (!code) await guard.afterWrongLink(address)
    const read = secret.length <= LONGEST_CODE ? readSlipCode(secret) : null
    throw problem(410, read && !read.ok ? read.error.message : UNKNOWN, { code: 'unknown-entry', title: TITLE })
  }
}

const UNKNOWN =
  'No entry belongs to it. It may be cut short or mistyped, the entry may have been taken out of its list, or its details were erased.'
