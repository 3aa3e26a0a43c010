import { TextField } from '#src/ui/field.tsx'

/** A password chosen anew. Shown while it is typed, since it is typed once. */
export function NewPasswordField({ error }: { readonly error?: string | undefined }) {
  return (
    <TextField
      name="password"
      label="New password"
      hint="At least 12 characters. Three or four unrelated words make a good one. It is shown while you type."
      autoComplete="new-password"
      autoCapitalize="none"
      autoCorrect="off"
      spellCheck={false}
      error={error}
    />
  )
}
