import type { Role } from '#shared/schemas/values.ts'

/** What each role may, for whoever gives it. */
export const ROLES: readonly { readonly value: Role; readonly text: string; readonly hint: string }[] = [
  {
    value: 'organiser',
    text: 'Organiser',
    hint: 'Sets up draws, gathers entrants and prizes, prepares the seal, enters tosses.',
  },
  {
    value: 'promoter',
    text: 'Promoter',
    hint: 'All of that, and opens, seals, postpones and cancels draws, and manages these people.',
  },
  {
    value: 'witness',
    text: 'Witness',
    hint: 'Sees the draws in which they are named, confirms or refuses, changes nothing.',
  },
]
