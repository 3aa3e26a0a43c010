import type { EntrantRow, entrantInput } from '#shared/schemas/api/office.ts'
import type { z } from 'zod'
import { TextField } from '#src/ui/field.tsx'

/** The values of the fields below, as they were typed. */
export function entrantFrom(data: FormData): z.input<typeof entrantInput> {
  const value = (name: string) => String(data.get(name) ?? '').trim()
  return {
    name: value('name'),
    tickets: wholeNumber(value('tickets')),
    label: value('label'),
    email: value('email'),
    phone: value('phone'),
    numbers: value('numbers'),
  }
}

/** `current` with what was typed differently from `base`: nobody's change to another field is undone. */
export function typedOver(
  current: EntrantRow,
  base: EntrantRow,
  typed: z.input<typeof entrantInput>,
): z.input<typeof entrantInput> {
  const kept = <Field extends keyof typeof typed>(field: Field): (typeof typed)[Field] =>
    (typed[field] ?? '') === (base[field] ?? '') ? current[field] : typed[field]
  return {
    name: kept('name'),
    tickets: kept('tickets'),
    label: kept('label'),
    email: kept('email'),
    phone: kept('phone'),
    numbers: kept('numbers'),
  }
}

/** A whole number as typed, with or without marks between thousands; NaN for anything else. */
export function wholeNumber(text: string): number {
  return /^(?:\d+|\d{1,3}(?:[, ]\d{3})+)$/.test(text) ? Number(text.replace(/[, ]/g, '')) : Number.NaN
}

interface EntrantFieldsProps {
  readonly values?: EntrantRow
  readonly faultOf: (field: string) => string | undefined
}

export function EntrantFields({ values, faultOf }: EntrantFieldsProps) {
  return (
    <>
      <div className="pair">
        <TextField name="name" label="Name" autoComplete="off" defaultValue={values?.name} error={faultOf('name')} />
        <TextField
          name="tickets"
          label="Tickets"
          size="short"
          inputMode="numeric"
          autoComplete="off"
          defaultValue={values?.tickets}
          error={faultOf('tickets')}
        />
      </div>
      <TextField
        name="label"
        label="Announced as"
        hint="The words that the public reads if this entrant wins. Left empty: first name and initial."
        autoComplete="off"
        defaultValue={values?.label}
        error={faultOf('label')}
      />
      <div className="pair">
        <TextField
          name="email"
          type="email"
          label="E-mail address, if any"
          autoComplete="off"
          defaultValue={values?.email ?? ''}
          error={faultOf('email')}
        />
        <TextField
          name="phone"
          type="tel"
          label="Telephone, if any"
          autoComplete="off"
          defaultValue={values?.phone ?? ''}
          error={faultOf('phone')}
        />
      </div>
      <TextField
        name="numbers"
        label="Ticket numbers, if any"
        hint="As on the stubs, for example 0271-0275, 0301."
        autoComplete="off"
        defaultValue={values?.numbers ?? ''}
        error={faultOf('numbers')}
      />
    </>
  )
}
