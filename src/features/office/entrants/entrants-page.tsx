import { useQuery } from '@tanstack/react-query'
import { useEffect, useState } from 'react'
import { useLocation, useParams, useSearchParams, type LoaderFunctionArgs } from 'react-router'
import type { EntrantRow, listEntrants } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { Button, ButtonLink } from '#src/ui/button.tsx'
import { SelectField } from '#src/ui/field.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { Empty, Failure, Skeleton } from '#src/ui/states.tsx'
import { entrantsQuery } from '../api/queries.ts'
import { useDraw } from '../draw/use-draw.ts'
import { drawPath } from '../paths.ts'
import { AddEntrant } from './add-entrant.tsx'
import { EntrantPanel } from './entrant-panel.tsx'
import { EntrantTable, rowButtonId } from './entrant-table.tsx'
import { whyFixed } from './list-words.ts'
import { entrantSearchFrom, entrantsHref, orderText, type EntrantListSearch } from './search.ts'

export async function loader(args: LoaderFunctionArgs) {
  const search = entrantSearchFrom(new URL(args.request.url).searchParams)
  await load(args, (api) => entrantsQuery(api, args.params.draw ?? '', search))
  return null
}

export function Component() {
  const draw = useDraw()
  const { search } = useLocation()
  return (
    <>
      <Head title={`Entrants: ${draw.title}`} description="Who is in the draw, with how many tickets." />
      {/* Another search is another list: no panel stays open over it. */}
      <List key={search} />
    </>
  )
}

type Found = ResponseOf<typeof listEntrants>
type Open = { readonly kind: 'add' } | { readonly kind: 'row'; readonly row: EntrantRow; readonly list: Found }

const ORDERS = [
  { value: 'added', text: 'As they came in' },
  { value: '-added', text: 'Latest first' },
  { value: 'name', text: 'Name' },
  { value: 'label', text: 'Announced as' },
  { value: '-tickets', text: 'Most tickets first' },
  { value: 'tickets', text: 'Fewest tickets first' },
  { value: 'code', text: 'Code' },
] as const

function List() {
  const { api } = useApp()
  const draw = useDraw()
  const organisation = useParams().organisation ?? ''
  const [params] = useSearchParams()
  const search = entrantSearchFrom(params)
  const { data, error, refetch } = useQuery(entrantsQuery(api, draw.id, search))
  const [open, setOpen] = useState<Open | null>(null)
  const [typed, setTyped] = useState(false)
  const [held, setHeld] = useState(false)
  const [words, setWords] = useState('')
  const [focusOn, setFocusOn] = useState<string | null>(null)
  useEffect(() => {
    // An entrant who was taken out has left no button behind.
    if (focusOn !== null) (document.getElementById(focusOn) ?? document.getElementById(ADD_BUTTON))?.focus()
  }, [focusOn])
  const href = (next: Partial<EntrantListSearch>) => entrantsHref(organisation, draw.id, next)
  const mayChange = draw.may.changeEntrants
  // The list stands still while one of its rows is open, whatever others do to it meanwhile.
  const list = open?.kind === 'row' ? open.list : data

  const close = (done: string, focus: string) => {
    setOpen(null)
    setTyped(false)
    setHeld(false)
    setWords(done)
    setFocusOn(focus)
  }
  const show = (next: Open) => {
    if (typed) return setHeld(true)
    setFocusOn(null)
    setOpen(next)
  }
  const toggle = (row: EntrantRow) => {
    if (open?.kind === 'row' && open.row.id === row.id && !typed) return close('', rowButtonId(row.id))
    if (list) show({ kind: 'row', row, list })
  }

  return (
    <Part title="Entrants" note={list && list.total > 0 ? noteOf(list, search.q) : null}>
      <ListActions
        mayChange={mayChange}
        why={whyFixed(draw)}
        opening={draw.may.open ? drawPath(organisation, draw.id, 'terms') : null}
        importPath={drawPath(organisation, draw.id, 'import')}
        adding={open?.kind === 'add'}
        onAdd={() => show({ kind: 'add' })}
      />
      {open?.kind === 'add' ? (
        <AddEntrant draw={draw.id} onTyped={setTyped} onClose={() => close('', ADD_BUTTON)} />
      ) : null}
      {draw.counts.entrants === 0 && search.q === '' && list?.total === 0 ? (
        <div className="mt-unit-2">
          <Empty title="Nobody is in the list yet.">
            {mayChange ? (
              <p>
                <Link to={drawPath(organisation, draw.id, 'import')}>Bring in a sheet</Link> from your spreadsheet, or
                add entrants one by one from their counterfoils.
              </p>
            ) : null}
          </Empty>
        </div>
      ) : (
        <>
          <div className="mt-unit-2">
            <SearchForm
              action={drawPath(organisation, draw.id, 'entrants')}
              label="Name, e-mail, telephone, ticket number or code"
              query={search.q}
            >
              <SelectField
                name="sort"
                label="Order"
                fieldClass="narrow phone-order"
                key={orderText(search)}
                defaultValue={orderText(search)}
                options={
                  ORDERS.some(({ value }) => value === orderText(search))
                    ? ORDERS
                    : [...ORDERS, { value: orderText(search), text: 'As sorted now' }]
                }
              />
            </SearchForm>
          </div>
          <div className="mt-unit-2">
            {list === undefined ? (
              error ? (
                <Failure
                  title="The list could not be read"
                  detail={detailsOf(error).detail}
                  onRetry={() => void refetch()}
                />
              ) : (
                <Skeleton label="Reading the entrants" lines={8} />
              )
            ) : list.items.length === 0 ? (
              <Empty title={list.total === 0 ? 'No entrant fits.' : 'This page of the list is empty.'}>
                <p>
                  {search.q ? 'Search for a part of the name or number. ' : ''}
                  <Link to={href({})}>Show the whole list</Link>.
                </p>
              </Empty>
            ) : (
              <EntrantTable
                rows={list.items}
                total={list.total}
                tickets={list.tickets}
                search={search}
                href={href}
                mayChange={mayChange}
                open={open?.kind === 'row' ? open.row.id : null}
                onToggle={toggle}
                panel={(row) => (
                  <EntrantPanel
                    draw={draw.id}
                    timeZone={draw.timeZone}
                    row={row}
                    mayChange={mayChange}
                    mayWrite={draw.organisation.state !== 'suspended'}
                    held={held}
                    onTyped={(now) => {
                      setTyped(now)
                      setHeld(false)
                    }}
                    onClose={(done) => close(done, rowButtonId(row.id))}
                  />
                )}
              />
            )}
            {list ? (
              <Pager
                page={list.page}
                pageSize={list.pageSize}
                total={list.total}
                noun="entrants"
                href={(page) => href({ ...search, page })}
              />
            ) : null}
          </div>
        </>
      )}
      <Announcer words={words} />
    </Part>
  )
}

const ADD_BUTTON = 'add-entrant'

function noteOf(list: Found, q: string): string {
  return q
    ? `${countOf(list.total, 'entrant')} found, with ${countOf(list.tickets, 'ticket')}.`
    : 'Every entrant of the list, sold or free.'
}

interface ListActionsProps {
  readonly mayChange: boolean
  readonly why: string | null
  /** Where this person opens the draw, so that entrants can come in; null where they cannot. */
  readonly opening: string | null
  readonly importPath: string
  readonly adding: boolean
  readonly onAdd: () => void
}

function ListActions({ mayChange, why, opening, importPath, adding, onAdd }: ListActionsProps) {
  if (!mayChange) {
    return (
      <>
        <p className="measure waits mt-0">{why}</p>
        {opening === null ? null : (
          <p className="buttons">
            <ButtonLink to={opening}>Go to the terms, to open the draw</ButtonLink>
          </p>
        )}
      </>
    )
  }
  return (
    <p className="buttons">
      <ButtonLink to={importPath}>Bring in a sheet</ButtonLink>
      <Button quiet id={ADD_BUTTON} aria-expanded={adding} onClick={onAdd}>
        Add an entrant
      </Button>
    </p>
  )
}
