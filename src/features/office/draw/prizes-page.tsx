import { useRef, useState } from 'react'
import { putPrizes, type OfficeDraw, type PrizeInput } from '#shared/schemas/api/office.ts'
import { Head } from '#src/lib/head.tsx'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { Button } from '#src/ui/button.tsx'
import { DataTable, type Column } from '#src/ui/data-table.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { countOf, formatMoney, formatNumber } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'
import { Empty } from '#src/ui/states.tsx'
import { useKeepDraw } from '../api/queries.ts'
import { OddsPart } from '../odds/odds-part.tsx'
import { moneyText, parseMoney } from '../money.ts'
import { useRole } from '../use-role.ts'
import { PrizeFields, type PrizeDraft } from './prize-fields.tsx'
import { useDraw } from './use-draw.ts'

export function Component() {
  const draw = useDraw()
  return (
    <>
      <Head title={`Prizes: ${draw.title}`} description="The prizes, in the order in which they are drawn." />
      {draw.may.edit ? (
        <Editor draw={draw} />
      ) : (
        <>
          <Reader draw={draw} />
          <Odds draw={draw} />
        </>
      )}
    </>
  )
}

function draftsOf(draw: OfficeDraw): PrizeDraft[] {
  return draw.prizes.map((prize) => ({
    key: prize.id,
    id: prize.id,
    name: prize.name,
    quantity: String(prize.quantity),
    donor: prize.donor ?? '',
    value: moneyText(prize.value),
    description: prize.description ?? '',
  }))
}

const emptyDraft = (key: string): PrizeDraft => ({
  key,
  name: '',
  quantity: '1',
  donor: '',
  value: '',
  description: '',
})

/** Prizes as typed; what is no number is given as NaN, so that the endpoint's schema refuses it. */
export function prizesFrom(drafts: readonly PrizeDraft[], currency: string): PrizeInput[] {
  return drafts.map((draft) => {
    const value = parseMoney(draft.value, currency)
    return {
      ...(draft.id ? { id: draft.id } : {}),
      name: draft.name,
      quantity: /^\d{1,9}$/.test(draft.quantity.trim()) ? Number(draft.quantity) : Number.NaN,
      donor: draft.donor,
      description: draft.description,
      value: value === undefined ? { minor: Number.NaN, currency } : value,
    }
  })
}

/** `prizes.2.name` belongs to the field `prize-2-name` on the page. */
export function prizeFault({ field, message }: { readonly field: string; readonly message: string }) {
  const match = /^prizes\.(\d+)\.(name|quantity|donor|description|value)(\.minor)?$/.exec(field)
  if (!match) return { field, message }
  const words = match[3] ? 'Type an amount, for example 25.00, or leave it empty.' : message
  return { field: `prize-${match[1]}-${match[2]}`, message: `Prize ${Number(match[1]) + 1}: ${words}` }
}

/** The list with the item at `from` moved to `to`; the list itself where either lies outside it. */
export function moved<Item>(items: readonly Item[], from: number, to: number): Item[] {
  const item = items[from]
  if (item === undefined || to < 0 || to >= items.length) return [...items]
  const rest = items.filter((_, index) => index !== from)
  return [...rest.slice(0, to), item, ...rest.slice(to)]
}

function Editor({ draw }: { readonly draw: OfficeDraw }) {
  const keep = useKeepDraw()
  const [version, setVersion] = useState(draw.version)
  const [drafts, setDrafts] = useState<readonly PrizeDraft[]>(() =>
    draw.prizes.length > 0 ? draftsOf(draw) : [emptyDraft('new 0')],
  )
  const [saved, setSaved] = useState(false)
  const [said, setSaid] = useState('')
  const made = useRef(1)
  const currency = draw.ticketPrice?.currency ?? draw.organisation.currency
  const form = useSubmit(putPrizes, async (changed) => {
    setVersion(changed.version)
    setDrafts(draftsOf(changed))
    setSaved(true)
    await keep(changed)
  })
  const faults = form.faults.map(prizeFault)
  const change = (next: readonly PrizeDraft[]) => {
    setSaved(false)
    setDrafts(next)
  }
  const move = (from: number, to: number) => {
    change(moved(drafts, from, to))
    setSaid(`${drafts[from]?.name || 'The prize'} is now drawn in place ${to + 1} of ${drafts.length}.`)
  }
  const items = drafts.reduce((sum, draft) => sum + (Number(draft.quantity) || 0), 0)
  return (
    <>
      <Part title="Prizes" note="In the order in which they are drawn: the first prize first.">
        <form
          className="form"
          method="post"
          noValidate
          onSubmit={(event) => {
            event.preventDefault()
            setSaved(false)
            form.submit({ params: { draw: draw.id }, body: { version, prizes: prizesFrom(drafts, currency) } })
          }}
        >
          {form.failed ? (
            <ErrorSummary
              title={form.status === 409 ? 'Somebody else has changed this draw' : undefined}
              detail={
                form.status === 409
                  ? `${form.detail ?? ''} Your prizes still stand below: load the page again to see theirs.`
                  : form.detail
              }
              errors={faults}
            />
          ) : null}
          <ol className="prize-rows">
            {drafts.map((draft, index) => (
              <li key={draft.key}>
                <PrizeFields
                  draft={draft}
                  index={index}
                  count={drafts.length}
                  currency={currency}
                  faultOf={(field) => faults.find((fault) => fault.field === field)?.message}
                  onChange={(next) => change(drafts.map((other) => (other.key === draft.key ? next : other)))}
                  onMove={(to) => move(index, to)}
                  onRemove={() => {
                    change(drafts.filter((other) => other.key !== draft.key))
                    setSaid(`${draft.name || 'The prize'} is taken out.`)
                  }}
                />
              </li>
            ))}
          </ol>
          {drafts.length === 0 ? <p>A draw needs at least one prize.</p> : null}
          <p className="buttons">
            <Button
              quiet
              onClick={() => {
                change([...drafts, emptyDraft(`new ${made.current}`)])
                made.current += 1
              }}
            >
              Add a prize
            </Button>
            <Button type="submit" busy={form.busy}>
              Save the prizes
            </Button>
            <span role="status">{saved && !form.failed ? `Saved: ${countOf(items, 'item')} to be won.` : ''}</span>
          </p>
        </form>
        <Announcer words={said} />
      </Part>
      <Odds draw={draw} prizes={items} />
    </>
  )
}

/** Who may not read the entrants is not told how their tickets are spread. */
function Odds({ draw, prizes }: { readonly draw: OfficeDraw; readonly prizes?: number }) {
  const role = useRole()
  if (role !== 'promoter' && role !== 'organiser') return null
  return <OddsPart drawId={draw.id} entrants={draw.counts.entrants} {...(prizes === undefined ? {} : { prizes })} />
}

type PrizeRow = OfficeDraw['prizes'][number]
const DONOR: Column<PrizeRow> = { key: 'donor', head: 'Given by', cell: (prize) => prize.donor ?? '' }
const VALUE: Column<PrizeRow> = {
  key: 'value',
  head: 'Value',
  numeric: true,
  cell: (prize) => (prize.value ? formatMoney(prize.value) : ''),
}

function Reader({ draw }: { readonly draw: OfficeDraw }) {
  return (
    <Part
      title="Prizes"
      note={draw.state === 'draft' ? undefined : 'Published when the draw opened, and fixed since then.'}
    >
      {draw.prizes.length === 0 ? (
        <Empty title="No prize yet." />
      ) : (
        <DataTable
          rows={draw.prizes}
          rowKey={(prize) => prize.id}
          columns={[
            { key: 'name', head: 'Prize', rowHead: true, cell: (prize) => prize.name },
            ...(draw.prizes.some(({ donor }) => donor) ? [DONOR] : []),
            ...(draw.prizes.some(({ value }) => value) ? [VALUE] : []),
            { key: 'quantity', head: 'How many', numeric: true, cell: (prize) => formatNumber(prize.quantity) },
          ]}
        />
      )}
    </Part>
  )
}
