// @vitest-environment jsdom
import { QueryClient } from '@tanstack/react-query'
import { act, cleanup, render, screen, waitFor } from '@testing-library/react'
import { createMemoryRouter, RouterProvider } from 'react-router'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { Providers } from '#src/app/providers.tsx'
import { HistoryPart } from '#src/features/draws/components/history-part.tsx'
import { LOG_MEMORY } from '#src/lib/log-memory.ts'
import type { DrawLog } from '#shared/schemas/api/log.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { drawnDraw } from '#tests/support/public-pages/fixtures.ts'
import { drawLogOf, logWith } from '#tests/support/public-pages/log-fixtures.ts'

// jsdom has a Uint8Array of its own, and the TextEncoder of Node makes the other kind; browsers have one.
vi.hoisted(() => {
  globalThis.Uint8Array = Object.getPrototypeOf(Buffer) as Uint8ArrayConstructor
})
beforeEach(() => window.localStorage.clear())
afterEach(cleanup)

const draw = drawnDraw()
const status = () =>
  screen
    .queryAllByRole('status')
    .map(({ textContent }) => textContent)
    .join('')

async function show(log: DrawLog): Promise<void> {
  const api: ApiClient = { call: (() => Promise.resolve(log)) as never }
  const router = createMemoryRouter([{ path: '/', element: <HistoryPart draw={draw} /> }])
  await act(async () => {
    render(
      <Providers app={{ api, origin: 'https://draws.example' }} queryClient={new QueryClient()}>
        <RouterProvider router={router} />
      </Providers>,
    )
  })
}

describe('the history of a draw', () => {
  it('is proven line by line in the browser, which remembers the checkpoint', async () => {
    await show(drawLogOf(draw))
    await waitFor(() => expect(status()).toContain('This browser has proven each of'))
    expect(screen.getAllByText(/proven against the checkpoint of size/)).toHaveLength(draw.history.length)
    for (const { index } of draw.history) {
      const link = screen.getByRole('link', { name: `Entry ${index} of the log` })
      expect(link.getAttribute('href')).toBe(`/log?at=${index}#entry-${index}`)
    }
    expect(window.localStorage.getItem(LOG_MEMORY)).toBe(drawLogOf(draw).head.note)
  })

  it('claims nothing for a line of which the log says something else', async () => {
    const log = logWith(draw)
    const { index } = draw.history[0] ?? { index: 0 }
    log.leaves[index] = (log.leaves[index] ?? '').replace('"opened"', '"restored"')
    await show(drawLogOf(draw, log))
    const count = draw.history.length
    await waitFor(() => expect(status()).toContain(`proven ${count - 1} of these ${count} lines`))
    expect(screen.getAllByText(/proven against the checkpoint of size/)).toHaveLength(count - 1)
  })

  it('raises the alarm where the log was forked since the last visit', async () => {
    await show(drawLogOf(draw))
    await waitFor(() => expect(window.localStorage.getItem(LOG_MEMORY)).not.toBeNull())
    cleanup()
    const other = logWith(draw)
    other.leaves[0] = (other.leaves[0] ?? '').replace('opened', 'closed')
    await show(drawLogOf(draw, other))
    await waitFor(() => expect(screen.getByRole('heading', { name: 'The log was forked' })).toBeTruthy())
    expect(status()).not.toContain('This browser has proven')
    expect(screen.getByText('Seen before:')).toBeTruthy()
  })
})
