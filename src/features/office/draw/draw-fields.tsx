import type { DrawInput, OfficeDraw } from '#shared/schemas/api/office.ts'
import { RadioField, TextArea, TextField } from '#src/ui/field.tsx'
import { zoneName } from '#src/ui/format-time.ts'
import { moneyText, parseMoney } from '../money.ts'

type Values = Pick<
  OfficeDraw,
  | 'title'
  | 'goodCause'
  | 'promoterName'
  | 'promoterAddress'
  | 'licence'
  | 'ticketPrice'
  | 'minimumAge'
  | 'terms'
  | 'closesAtLocal'
  | 'drawAtLocal'
  | 'rule'
  | 'reserves'
>

interface DrawFieldsProps {
  readonly values?: Values
  /** For a new draw: what the organisation already knows of itself. */
  readonly defaults?: { readonly promoterAddress: string }
  readonly timeZone: string
  readonly currency: string
  readonly faultOf: (field: string) => string | undefined
}

export const RULE_WORDS = {
  'one-prize-each': 'At most one prize for each entrant: who has won leaves the list',
  'every-ticket': 'Every ticket can win once: an entrant with several tickets can win several prizes',
} as const

/** Everything that an organiser types about a draw, on one screen. */
export function DrawFields({ values, defaults, timeZone, currency, faultOf }: DrawFieldsProps) {
  const zone = zoneName(timeZone)
  return (
    <>
      <TextField name="title" label="Title" defaultValue={values?.title} error={faultOf('title')} />
      <TextField
        name="goodCause"
        label="Good cause"
        hint="What the proceeds are for, as the public reads it after “In aid of”."
        size="wide"
        defaultValue={values?.goodCause}
        error={faultOf('goodCause')}
      />
      <div className="pair">
        <TextField
          name="promoterName"
          label="Promoter"
          hint="The person who answers for the draw."
          defaultValue={values?.promoterName}
          error={faultOf('promoterName')}
        />
        <TextField
          name="promoterAddress"
          label="Promoter’s address"
          hint="Where the promoter can be reached; it is public."
          defaultValue={values?.promoterAddress ?? defaults?.promoterAddress}
          error={faultOf('promoterAddress')}
        />
      </div>
      <TextField
        name="licence"
        label="Registration or licence of this draw, if it has one"
        hint="As you state it: the kind, the number and who gave it. Ask your local authority whether you need one."
        size="wide"
        defaultValue={values?.licence ?? ''}
        error={faultOf('licence')}
      />
      <div className="pair">
        <TextField
          name="ticketPrice"
          label={`Price of a ticket (${currency})`}
          hint="For example 2.00. Leave it empty where tickets are free."
          size="short"
          inputMode="decimal"
          defaultValue={moneyText(values?.ticketPrice ?? null)}
          error={faultOf('ticketPrice')}
        />
        <TextField
          name="minimumAge"
          label="Minimum age"
          hint="Leave it empty where there is none. Many places set one for paid tickets."
          size="short"
          inputMode="numeric"
          defaultValue={values?.minimumAge ?? ''}
          error={faultOf('minimumAge')}
        />
      </div>
      <div className="pair">
        <TextField
          name="closesAt"
          type="datetime-local"
          label="The list closes"
          hint={`In ${zone}.`}
          defaultValue={values?.closesAtLocal}
          error={faultOf('closesAt')}
        />
        <TextField
          name="drawAt"
          type="datetime-local"
          label="The draw"
          hint={`In ${zone}. Leave time to look through the list and seal it.`}
          defaultValue={values?.drawAtLocal}
          error={faultOf('drawAt')}
        />
      </div>
      <RadioField
        name="rule"
        legend="Rule"
        defaultValue={values?.rule ?? 'one-prize-each'}
        error={faultOf('rule')}
        options={Object.entries(RULE_WORDS).map(([value, text]) => ({ value, text }))}
      />
      <TextField
        name="reserves"
        label="Reserves"
        hint="Drawn after the prizes, and called in order if a prize is not claimed."
        size="short"
        inputMode="numeric"
        defaultValue={values?.reserves ?? 3}
        error={faultOf('reserves')}
      />
      <TextArea
        name="terms"
        label="Terms"
        hint="Who may enter and who may not, how tickets are had and paid for, whether one can enter free by post, how long a prize can be claimed, whose names are published. Entrants read them before they pay; from the opening on they are fixed."
        rows={12}
        defaultValue={values?.terms}
        error={faultOf('terms')}
      />
    </>
  )
}

const NOT_A_NUMBER = Number.NaN

/**
 * The draw as typed. What is no amount or no whole number is given as NaN, so that the endpoint's own schema refuses it
 * and the field gets its message.
 */
export function drawFrom(data: FormData, currency: string): DrawInput {
  const value = (name: string) => String(data.get(name) ?? '').trim()
  const price = parseMoney(value('ticketPrice'), currency)
  const whole = (text: string) => (/^\d{1,9}$/.test(text) ? Number(text) : NOT_A_NUMBER)
  return {
    title: value('title'),
    goodCause: value('goodCause'),
    promoterName: value('promoterName'),
    promoterAddress: value('promoterAddress'),
    licence: value('licence'),
    ticketPrice: price === undefined ? { minor: NOT_A_NUMBER, currency } : price,
    minimumAge: value('minimumAge') === '' ? null : whole(value('minimumAge')),
    terms: value('terms'),
    closesAt: value('closesAt').slice(0, 16),
    drawAt: value('drawAt').slice(0, 16),
    rule: value('rule') as DrawInput['rule'],
    reserves: whole(value('reserves')),
  }
}

const FIELD_OF: Record<string, readonly [field: string, message: string]> = {
  'ticketPrice.minor': ['ticketPrice', 'Type an amount, for example 2.00, or leave it empty.'],
  minimumAge: ['minimumAge', 'Type a whole number of years, for example 16, or leave it empty.'],
  reserves: ['reserves', 'Type a whole number, for example 3.'],
}

/** What the schema says of a field, said of the field as it stands on the page. */
export function drawFault(fault: { readonly field: string; readonly message: string }) {
  const [field, message] = FIELD_OF[fault.field] ?? [fault.field, fault.message]
  const time = /^Type a date and a time(.*)$/.exec(message)
  // Said of two fields at once, it has to say of which.
  if (time)
    return { field, message: `Type the date and time of the ${field === 'drawAt' ? 'draw' : 'closing'}${time[1]}` }
  return { field, message }
}
