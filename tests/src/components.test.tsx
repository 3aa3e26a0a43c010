// @vitest-environment jsdom
import { act, cleanup, fireEvent, render, screen, within } from '@testing-library/react'
import { renderToString } from 'react-dom/server'
import { afterEach, describe, expect, it, vi } from 'vitest'
import { Button } from '#src/ui/button.tsx'
import { CopyButton } from '#src/ui/copy-button.tsx'
import { Countdown } from '#src/ui/countdown.tsx'
import { DataTable } from '#src/ui/data-table.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextField } from '#src/ui/field.tsx'
import { LeafChart } from '#src/ui/spread-chart.tsx'
import { StateTicket, type TicketState } from '#src/ui/state-ticket.tsx'

afterEach(() => {
  cleanup()
  vi.useRealTimers()
  vi.unstubAllGlobals()
})

describe('the error summary', () => {
  it('takes focus and links to each field at fault', () => {
    render(
      <>
        <ErrorSummary errors={[{ field: 'tickets', message: 'Type a whole number from 1 to 40.' }]} />
        <TextField name="tickets" label="Tickets" hint="As on the stub" error="Type a whole number from 1 to 40." />
      </>,
    )
    expect(document.activeElement).toBe(screen.getByRole('alert'))
    const link = within(screen.getByRole('alert')).getByRole('link')
    const field = screen.getByLabelText('Tickets')
    expect(link.getAttribute('href')).toBe(`#${field.id}`)
    expect(field.getAttribute('aria-invalid')).toBe('true')
    const described = field
      .getAttribute('aria-describedby')
      ?.split(' ')
      .map((id) => document.getElementById(id)?.textContent)
    expect(described).toEqual(['As on the stub', 'Error: Type a whole number from 1 to 40.'])
  })
})

describe('the countdown', () => {
  it('is the same on the server and in the first browser render, then ticks by the server’s clock', async () => {
    // The reader's clock is an hour and a bit wrong: it must not matter.
    vi.useFakeTimers({ now: new Date('2026-06-19T17:12:00Z') })
    const countdown = <Countdown to="2026-06-19T18:30:00Z" serverNow="2026-06-19T18:28:58Z" what="the draw" />
    const server = renderToString(countdown)
    expect(server.replace(/<[^>]+>/g, '')).toContain('1 minute 2 seconds')
    render(countdown)
    expect(screen.getByRole('timer').textContent).toBe('1 minute 2 seconds ')
    await act(() => vi.advanceTimersByTimeAsync(3_000))
    expect(screen.getByRole('timer').textContent).toBe('0 minutes 59 seconds ')
    expect(screen.getByRole('status').textContent).toBe('1 minute to the draw.')
    await act(() => vi.advanceTimersByTimeAsync(90_000))
    expect(screen.getByRole('timer').textContent).toBe('0 minutes 0 seconds ')
  })
})

describe('the copy button', () => {
  it('cannot be seen without JavaScript, copies the whole value and says so', async () => {
    const writeText = vi.fn(() => Promise.resolve())
    vi.stubGlobal('navigator', { clipboard: { writeText } })
    expect(renderToString(<CopyButton value="abc" what="the seal" />)).toContain('invisible')
    render(<CopyButton value="abc" what="the seal" />)
    await act(async () => void fireEvent.click(screen.getByRole('button')))
    expect(writeText).toHaveBeenCalledWith('abc')
    expect(screen.getByRole('status').textContent).toBe('Copied the seal.')
  })
  it('says what to do where the browser refuses', async () => {
    vi.stubGlobal('navigator', { clipboard: { writeText: () => Promise.reject(new Error('no')) } })
    render(<CopyButton value="abc" what="the seal" />)
    await act(async () => void fireEvent.click(screen.getByRole('button')))
    expect(screen.getByRole('status').textContent).toContain('Mark the digits and copy them.')
  })
})

describe('a busy button', () => {
  it('stays focusable, says so and ignores clicks', () => {
    const clicked = vi.fn()
    render(
      <Button busy onClick={clicked}>
        Seal
      </Button>,
    )
    const button = screen.getByRole('button')
    fireEvent.click(button)
    expect(clicked).not.toHaveBeenCalled()
    expect(button.getAttribute('aria-disabled')).toBe('true')
    expect(button.hasAttribute('disabled')).toBe(false)
  })
})

describe('a table', () => {
  it('keeps its roles and says each head again for phones', () => {
    render(
      <DataTable
        caption="Odds"
        rows={[{ held: 5 }]}
        rowKey={(row) => String(row.held)}
        columns={[
          { key: 'held', head: 'If you hold', rowHead: true, cell: (row) => row.held },
          { key: 'chance', head: 'First prize', numeric: true, cell: () => '1 in 31' },
        ]}
      />,
    )
    const table = screen.getByRole('table', { name: 'Odds' })
    expect(within(table).getByRole('rowheader').textContent).toBe('5')
    expect(within(table).getByRole('cell').getAttribute('data-label')).toBe('First prize')
  })
})

describe('the chart of a small list', () => {
  it('draws one dot a ticket and fills the winners', () => {
    const { container } = render(<LeafChart tickets={[2, 5, 1]} winners={[1]} />)
    const desk = container.querySelector('svg.desk')
    expect(desk?.querySelectorAll('circle')).toHaveLength(8)
    expect(desk?.querySelectorAll('circle.dot-in')).toHaveLength(5)
    expect(screen.getAllByRole('img')[0]?.getAttribute('aria-label')).toContain('3 entrants, from 1 to 5')
  })
  it('turns to bars where dots would not fit', () => {
    const { container } = render(
      <LeafChart tickets={Array.from({ length: 300 }, (_, index) => index + 1)} winners={[299]} />,
    )
    expect(container.querySelectorAll('rect')).toHaveLength(300)
    expect(container.querySelectorAll('rect.dot-in')).toHaveLength(1)
  })
})

describe('the state of a draw', () => {
  it('is a shape of its own and always a word', () => {
    const states: TicketState[] = [
      'draft',
      'open',
      'closed',
      'sealed',
      'drawn',
      'concluded',
      'cancelled',
      'failed',
      'postponed',
    ]
    const shapes = states.map((state) => {
      const { container, unmount } = render(<StateTicket state={state} />)
      const shape = container.querySelector('svg')?.innerHTML
      expect(container.textContent?.toLowerCase()).toBe(state)
      unmount()
      return shape
    })
    expect(new Set(shapes).size).toBe(states.length)
  })
})
