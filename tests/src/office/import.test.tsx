// @vitest-environment jsdom
import { act, cleanup, fireEvent, screen, waitFor, within } from '@testing-library/react'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import type { ImportView } from '#shared/schemas/api/office.ts'
import { fakeApi, refusal } from '#tests/support/office/fake-api.ts'
import { DRAW, DRAW_ID, IMPORT_ID, importView, officeDraw, session } from '#tests/support/office/fixtures.ts'
import { openPage } from '#tests/support/office/render.tsx'

beforeEach(() => vi.stubGlobal('scrollTo', () => {}))
afterEach(() => {
  cleanup()
  vi.unstubAllGlobals()
})

type Listed = Omit<ImportView, 'errors' | 'preview'>
const base = (view: ImportView, others: readonly Listed[] = []) => ({
  getSession: () => session(),
  getOfficeDraw: () => officeDraw(),
  getImport: () => view,
  listImports: () => [view, ...others],
})
const page = `${DRAW}/import/${IMPORT_ID}`
const button = (name: string | RegExp) => screen.queryByRole('button', { name })
const params = { draw: DRAW_ID, import: IMPORT_ID }

describe('the page of an import', () => {
  it('shows how far the reading is and goes on by itself', async () => {
    let asked = 0
    const api = fakeApi({
      ...base(importView()),
      getImport: () =>
        ++asked < 2
          ? importView({ state: 'reading', bytesRead: 1_000_000, bytesTotal: 4_000_000, rows: 52_000, preview: [] })
          : importView({ bytesRead: 4_000_000, bytesTotal: 4_000_000 }),
    })
    await openPage(page, api)
    const bar = screen.getByRole<HTMLProgressElement>('progressbar', {
      name: /1.0 MB of 4.0 MB read. 52,000 rows so far/,
    })
    expect(bar.value).toBe(0.25)
    expect(button(/into the list/)).toBeNull()
    await waitFor(() => expect(button('Bring 2 entrants into the list')).not.toBeNull(), { timeout: 3000 })
    expect(screen.queryByRole('progressbar')).toBeNull()
  })

  it('shows the first rows and what the list will hold, says which columns are left out, and brings all in', async () => {
    const ready = importView({ ignoredColumns: ['Paid', 'Seller'] })
    const api = fakeApi({ ...base(ready), applyImport: () => ({ ...ready, state: 'applied', preview: [] }) })
    await openPage(page, api)
    expect(screen.getByText(/the list has 5 entrants and 32 tickets/)).toBeDefined()
    expect(screen.getByText(/not read and not stored: Paid, Seller/)).toBeDefined()
    expect(within(screen.getByRole('table')).getByRole('row', { name: /Ines Duarte/ }).textContent).toContain('7')
    await act(async () => fireEvent.click(screen.getByRole('button', { name: 'Bring 2 entrants into the list' })))
    await waitFor(() => expect(screen.getByText('Brought in: 2 entrants with 13 tickets.')).toBeDefined())
    expect(api.of('applyImport')).toEqual([{ params }])
    expect(screen.getByRole('link', { name: 'See the list' }).getAttribute('href')).toBe(`${DRAW}/entrants`)
    expect(api.of('getOfficeDraw').length).toBeGreaterThan(1)
  })

  it('warns of a sheet that was brought in before', async () => {
    const before = importView({ id: 'b6d6b7a2-52a4-4b0e-9b5a-7f6d5f0c3c29', state: 'applied' })
    await openPage(page, fakeApi(base(importView(), [before])))
    expect(await screen.findByText('Is this the same file again?')).toBeDefined()
  })

  it('keeps a refused import ready and says why', async () => {
    const detail = 'A ticket number in this file is held by an entrant who is in the list already.'
    const api = fakeApi({ ...base(importView()), applyImport: () => Promise.reject(refusal(409, detail)) })
    await openPage(page, api)
    await act(async () => fireEvent.click(screen.getByRole('button', { name: 'Bring 2 entrants into the list' })))
    await screen.findByText(detail)
    expect(document.activeElement).toBe(screen.getByRole('alert'))
    expect(button('Bring 2 entrants into the list')).not.toBeNull()
  })

  it('never offers a faulty file to the list, and names each row and what to do', async () => {
    const message = (row: number) => `Row ${row}: "l2" is not a whole number of tickets. Write it in digits, like 25.`
    const faulty = importView({
      state: 'faulty',
      preview: [],
      errorCount: 1204,
      errors: [9, 12, 30, 31].map((row) => ({ row, column: 'tickets', message: message(row) })),
    })
    const api = fakeApi({ ...base(faulty), discardImport: () => ({ ...faulty, state: 'discarded', errors: [] }) })
    await openPage(page, api)
    expect(button(/into the list/)).toBeNull()
    expect(screen.getByText('Row 9')).toBeDefined()
    expect(screen.getByText('"l2" is not a whole number of tickets. Write it in digits, like 25.')).toBeDefined()
    expect(screen.getByText('The same in rows 12, 30 and 31.')).toBeDefined()
    expect(screen.getByText(/the first 4 of 1,204 errors/)).toBeDefined()
    expect(screen.getByRole('link', { name: 'bring in the new one' }).getAttribute('href')).toBe(`${DRAW}/import`)
    await act(async () => fireEvent.click(screen.getByRole('button', { name: 'Throw it away' })))
    await screen.findByText('Thrown away. Nothing of it is in the list.')
    expect(api.of('discardImport')).toEqual([{ params }])
  })

  it('says how to go on after half an upload', async () => {
    const failure = 'The upload broke off. Nothing was stored; upload it again.'
    await openPage(page, fakeApi(base(importView({ state: 'failed', failure, preview: [] }))))
    expect(screen.getByText(failure)).toBeDefined()
    expect(screen.getByRole('link', { name: 'Upload it again' }).getAttribute('href')).toBe(`${DRAW}/import`)
    expect(button('Throw it away')).toBeNull()
  })

  it('brings nothing into a list that has closed meanwhile', async () => {
    const api = fakeApi({ ...base(importView()), getOfficeDraw: () => officeDraw({ state: 'closed' }) })
    await openPage(page, api)
    expect(button(/into the list/)).toBeNull()
    expect(screen.getByText(/^The list is closed/)).toBeDefined()
  })
})

/** The parts of XMLHttpRequest that an upload uses, driven by the test. */
class FakeRequest {
  static last: FakeRequest
  upload: { onprogress: ((event: unknown) => void) | null } = { onprogress: null }
  onload: (() => void) | null = null
  onerror: (() => void) | null = null
  onabort: (() => void) | null = null
  status = 0
  responseText = ''
  opened: readonly string[] = []
  sent: FormData | null = null
  constructor() {
    FakeRequest.last = this
  }
  open(...args: string[]) {
    this.opened = args
  }
  setRequestHeader() {}
  send(form: FormData) {
    this.sent = form
  }
  abort() {
    this.onabort?.()
  }
  answer(status: number, body: unknown) {
    this.status = status
    this.responseText = JSON.stringify(body)
    this.onload?.()
  }
}

describe('bringing in a sheet', () => {
  beforeEach(() => vi.stubGlobal('XMLHttpRequest', FakeRequest))

  const sheet = (name = 'books.csv', text = 'name,tickets\nPiran Nance,6\n') => new File([text], name)
  const input = () => screen.getByLabelText<HTMLInputElement>('Sheet of entrants')
  async function choose(file: File) {
    await act(async () => {
      fireEvent.change(input(), { target: { files: [file] } })
    })
  }
  const upload = () => act(async () => fireEvent.click(screen.getByRole('button', { name: /^Upload it/ })))
  async function uploading() {
    const opened = await openPage(`${DRAW}/import`, fakeApi(base(importView())))
    await choose(sheet())
    await upload()
    return opened
  }

  it('asks for a file before anything is sent', async () => {
    await openPage(`${DRAW}/import`, fakeApi(base(importView())))
    await upload()
    expect(screen.getByText('Choose a CSV file.')).toBeDefined()
    expect(document.activeElement).toBe(input())
    expect(input().getAttribute('aria-invalid')).toBe('true')
  })

  it('sends no file that it can see is wrong', async () => {
    await openPage(`${DRAW}/import`, fakeApi(base(importView())))
    await choose(sheet('books.xlsx'))
    const large = sheet()
    Object.defineProperty(large, 'size', { value: 200_000_001 })
    await choose(large)
    expect(screen.getByText(/at most 200 MB. Split it/)).toBeDefined()
    const before = FakeRequest.last
    await upload()
    expect(FakeRequest.last).toBe(before)
  })

  it('takes a file that is dropped', async () => {
    await openPage(`${DRAW}/import`, fakeApi(base(importView())))
    await act(async () => {
      fireEvent.drop(input().closest('.drop') as Element, { dataTransfer: { files: [sheet('dropped.csv')] } })
    })
    await upload()
    expect((FakeRequest.last.sent?.get('file') as File).name).toBe('dropped.csv')
  })

  it('sends the file under its name, shows how far it is, and goes to what was found', async () => {
    const { router } = await uploading()
    expect(FakeRequest.last.opened).toEqual(['POST', `/api/office/draws/${DRAW_ID}/imports`])
    expect((FakeRequest.last.sent?.get('file') as File).name).toBe('books.csv')
    act(() => FakeRequest.last.upload.onprogress?.({ loaded: 60_000, total: 240_000, lengthComputable: true }))
    const bar = screen.getByRole<HTMLProgressElement>('progressbar', { name: /60 kB of 240 kB sent/ })
    expect(bar.position).toBe(0.25)
    act(() => FakeRequest.last.upload.onprogress?.({ loaded: 240_000, total: 240_000, lengthComputable: true }))
    expect(screen.getByRole('progressbar', { name: /The site reads its rows/ })).toBeDefined()
    await act(async () => FakeRequest.last.answer(200, importView()))
    await waitFor(() => expect(router.state.location.pathname).toBe(page))
    expect(await screen.findByRole('button', { name: 'Bring 2 entrants into the list' })).toBeDefined()
  })

  it('keeps the chosen file when the connection breaks, and sends it again', async () => {
    await uploading()
    act(() => FakeRequest.last.upload.onprogress?.({ loaded: 10, total: 30, lengthComputable: true }))
    await act(async () => FakeRequest.last.onerror?.())
    const alert = screen.getByRole('alert')
    expect(alert.textContent).toMatch(/connection broke before the whole file was there. Nothing was stored/)
    expect(document.activeElement).toBe(alert)
    const first = FakeRequest.last
    await upload()
    expect(FakeRequest.last).not.toBe(first)
    expect((FakeRequest.last.sent?.get('file') as File).name).toBe('books.csv')
  })

  it('stops when told to and is ready for another file', async () => {
    await uploading()
    await act(async () => fireEvent.click(screen.getByRole('button', { name: 'Stop' })))
    expect(screen.queryByRole('progressbar')).toBeNull()
    expect(screen.getByText('You stopped the upload. Nothing was stored.')).toBeDefined()
    expect(screen.getByRole('button', { name: /^Upload it/ })).toBeDefined()
  })

  it('says in the server’s words why a file was refused', async () => {
    await uploading()
    await act(async () =>
      FakeRequest.last.answer(413, {
        type: '/problems/file-too-large',
        title: 'Too large',
        status: 413,
        detail: 'One field.',
        errors: [{ field: 'file', message: 'Choose a file of at most 200 MB.' }],
      }),
    )
    expect(screen.getByRole('alert').textContent).toContain('Choose a file of at most 200 MB.')
  })

  it('lists the sheets so far with what became of them', async () => {
    await openPage(`${DRAW}/import`, fakeApi(base(importView({ state: 'applied' }))))
    expect(screen.getByRole('link', { name: 'stub books 1-6.csv' }).getAttribute('href')).toBe(page)
    expect(screen.getByText('Brought in: 2 entrants with 13 tickets.')).toBeDefined()
  })

  it('takes no file for a closed list', async () => {
    const api = fakeApi({ ...base(importView()), getOfficeDraw: () => officeDraw({ state: 'closed' }) })
    await openPage(`${DRAW}/import`, api)
    expect(screen.queryByLabelText('Sheet of entrants')).toBeNull()
    expect(screen.getByText(/^The list is closed/)).toBeDefined()
  })
})
