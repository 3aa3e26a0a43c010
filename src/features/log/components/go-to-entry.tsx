import { Form } from 'react-router'
import { Button } from '#src/ui/button.tsx'
import { TextField } from '#src/ui/field.tsx'

/** Finds an entry by its number; works without JavaScript. */
export function GoToEntry({ asked }: { readonly asked: string }) {
  return (
    <Form method="get" action="/log" role="search" className="search-form">
      <TextField
        name="at"
        label="Number of an entry"
        inputMode="numeric"
        defaultValue={asked}
        key={asked}
        maxLength={16}
      />
      <Button type="submit" native>
        Go to this entry
      </Button>
    </Form>
  )
}
