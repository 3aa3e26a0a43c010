import { SelectField, TextArea, TextField } from '#src/ui/field.tsx'

export interface OrganisationValues {
  readonly name: string
  readonly registration: string | null
  readonly address: string
  readonly about: string
  readonly timeZone: string
  readonly currency: string
}

/** The values of the fields below, as they were typed. */
export function organisationFrom(data: FormData): OrganisationValues {
  const value = (name: string) => String(data.get(name) ?? '')
  return {
    name: value('name'),
    registration: value('registration').trim(),
    address: value('address'),
    about: value('about').replace(/\s+/g, ' '),
    timeZone: value('timeZone'),
    currency: value('currency').trim().toUpperCase(),
  }
}

/** Every zone that this machine knows, with the one in use, in the order of their names. */
function timeZones(inUse: string | undefined): readonly string[] {
  const known = new Set(['UTC', ...Intl.supportedValuesOf('timeZone')])
  if (inUse) known.add(inUse)
  return [...known].sort()
}

interface OrganisationFieldsProps {
  readonly values?: OrganisationValues
  readonly faultOf: (field: string) => string | undefined
}

export function OrganisationFields({ values, faultOf }: OrganisationFieldsProps) {
  return (
    <>
      <TextField name="name" label="Name" defaultValue={values?.name} error={faultOf('name')} />
      <TextField
        name="registration"
        label="Registration, if it has one"
        hint="The charity or society number, with the register that gave it. It stands on every seal."
        defaultValue={values?.registration ?? ''}
        error={faultOf('registration')}
      />
      <TextField name="address" label="Postal address" defaultValue={values?.address} error={faultOf('address')} />
      <TextArea
        name="about"
        label="What it does"
        hint="A sentence or two that the public reads."
        rows={3}
        defaultValue={values?.about}
        error={faultOf('about')}
      />
      <SelectField
        name="timeZone"
        label="Time zone"
        hint="Closing and draw times are typed and shown in it."
        defaultValue={values?.timeZone ?? 'Europe/London'}
        error={faultOf('timeZone')}
        options={timeZones(values?.timeZone).map((zone) => ({ value: zone, text: zone.replaceAll('_', ' ') }))}
      />
      <TextField
        name="currency"
        label="Currency"
        hint="Three letters, for example GBP."
        size="short"
        maxLength={3}
        defaultValue={values?.currency ?? 'GBP'}
        error={faultOf('currency')}
      />
    </>
  )
}
