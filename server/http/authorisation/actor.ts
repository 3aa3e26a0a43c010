import type { Role } from '#shared/schemas/values.ts'

/** Who makes a request, as the database knows them at that moment; a disabled person counts as nobody. */
export interface Actor {
  readonly person: {
    readonly id: string
    readonly name: string
    readonly email: string
    readonly administrator: boolean
  } | null
  readonly memberships: readonly { readonly organisationId: string; readonly role: Role }[]
}

export const NOBODY: Actor = { person: null, memberships: [] }

/** What a request is about, as far as rights depend on it. */
export interface Resource {
  readonly organisation: {
    readonly id: string
    readonly slug: string
    readonly state: 'pending' | 'approved' | 'suspended'
  }
  /** `witnesses` are the ids of the persons named as witnesses of this very draw. */
  readonly draw: { readonly id: string; readonly witnesses: readonly string[] } | null
}
