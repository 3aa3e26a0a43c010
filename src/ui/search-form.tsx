import type { ReactNode } from 'react'
import { Form } from 'react-router'
import { Button } from './button.tsx'
import { TextField } from './field.tsx'

interface SearchFormProps {
  readonly action: string
  readonly label: string
  readonly hint?: string
  readonly query: string
  readonly children?: ReactNode
}

/** A search by GET: an ordinary form without JavaScript, no page load with it. */
export function SearchForm({ action, label, hint, query, children }: SearchFormProps) {
  return (
    <Form method="get" action={action} role="search" className="search-form">
      <TextField
        name="q"
        label={label}
        hint={hint}
        type="search"
        defaultValue={query}
        key={query}
        size="wide"
        maxLength={100}
      />
      {children}
      <Button type="submit" native>
        Search
      </Button>
    </Form>
  )
}
