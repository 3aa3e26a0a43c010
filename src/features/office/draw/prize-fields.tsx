import { Button } from '#src/ui/button.tsx'
import { TextField } from '#src/ui/field.tsx'

/** A prize as it stands in the form: everything as typed. */
export interface PrizeDraft {
  readonly key: string
  readonly id?: string
  readonly name: string
  readonly quantity: string
  readonly donor: string
  readonly value: string
  readonly description: string
}

interface PrizeFieldsProps {
  readonly draft: PrizeDraft
  readonly index: number
  readonly count: number
  readonly currency: string
  readonly faultOf: (field: string) => string | undefined
  readonly onChange: (draft: PrizeDraft) => void
  readonly onMove: (to: number) => void
  readonly onRemove: () => void
}

/** One prize of the form, with the buttons that move it in the order of drawing. */
export function PrizeFields({ draft, index, count, currency, faultOf, onChange, onMove, onRemove }: PrizeFieldsProps) {
  const id = (name: string) => `prize-${index}-${name}`
  const field = (name: 'name' | 'quantity' | 'donor' | 'value' | 'description') => ({
    name: id(name),
    value: draft[name],
    error: faultOf(id(name)),
    onChange: (event: { target: { value: string } }) => onChange({ ...draft, [name]: event.target.value }),
  })
  const called = draft.name || `prize ${index + 1}`
  return (
    <fieldset className="form">
      <legend className="vh">{`Prize ${index + 1} of ${count}`}</legend>
      <div className="pair">
        <TextField label={`${index + 1}. Prize`} {...field('name')} />
        <TextField label="How many" size="short" inputMode="numeric" {...field('quantity')} />
      </div>
      <div className="pair">
        <TextField label="Given by" {...field('donor')} />
        <TextField label={`Value of one (${currency})`} size="short" inputMode="decimal" {...field('value')} />
      </div>
      <TextField label="Description or conditions" size="wide" {...field('description')} />
      <p className="buttons">
        <Button
          small
          quiet
          aria-label={`Draw ${called} earlier`}
          aria-disabled={index === 0 ? true : undefined}
          onClick={() => index > 0 && onMove(index - 1)}
        >
          Earlier
        </Button>
        <Button
          small
          quiet
          aria-label={`Draw ${called} later`}
          aria-disabled={index === count - 1 ? true : undefined}
          onClick={() => index < count - 1 && onMove(index + 1)}
        >
          Later
        </Button>
        <Button small quiet aria-label={`Take ${called} out`} onClick={onRemove}>
          Take out
        </Button>
      </p>
    </fieldset>
  )
}
