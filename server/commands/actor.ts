/** Who does something: a person, or null for the worker. */
export type CommandActor = { readonly id: string; readonly name: string } | null
