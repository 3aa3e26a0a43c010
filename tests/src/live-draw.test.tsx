// @vitest-environment jsdom
import { act, cleanup, render, screen } from '@testing-library/react'
import { createMemoryRouter, RouterProvider } from 'react-router'
import { QueryClient } from '@tanstack/react-query'
import { afterEach, describe, expect, it, vi } from 'vitest'
import { Providers } from '#src/app/providers.tsx'
import { pollingInterval } from '#src/features/draws/api/get-draw.ts'
import { Component } from '#src/features/draws/draw-page.tsx'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { oddsOf } from '#tests/support/public-pages/fixture-client.ts'
import { drawnDraw, sealedDraw } from '#tests/support/public-pages/fixtures.ts'
import { drawLogOf } from '#tests/support/public-pages/log-fixtures.ts'

afterEach(() => {
  cleanup()
  vi.useRealTimers()
})

const soon = (over: Partial<DrawPage> = {}) => sealedDraw({ slug: 'live', now: '2026-06-19T18:29:58Z', ...over })

describe('a sealed draw’s page in an open browser', () => {
  it('shows the result by itself, keeps its parts in their places, announces it and leaves focus alone', async () => {
    vi.useFakeTimers({ now: new Date('2026-06-19T18:29:58Z'), shouldAdvanceTime: true })
    let answer: DrawPage = soon()
    const answers: Record<string, () => unknown> = {
      getDraw: () => answer,
      getDrawOdds: () => oddsOf(answer),
      getDrawLog: () => drawLogOf(answer),
    }
    const api: ApiClient = { call: vi.fn((endpoint) => Promise.resolve(answers[endpoint.name]?.() as never)) }
    const router = createMemoryRouter([{ path: '/draws/:slug', Component }], { initialEntries: ['/draws/live'] })
    await act(async () => {
      render(
        <Providers app={{ api, origin: 'https://draws.example' }} queryClient={new QueryClient()}>
          <RouterProvider router={router} />
        </Providers>,
      )
      await vi.advanceTimersByTimeAsync(10)
    })
    const before = screen.getAllByRole('heading', { level: 2 }).map((heading) => heading.textContent)
    expect(before.slice(0, 3)).toEqual(['Time to the draw', 'Who wins', 'The seal'])
    expect(screen.getAllByText('To be drawn').length).toBeGreaterThanOrEqual(5)
    const link = screen.getByRole('link', { name: 'entries.csv' })
    link.focus()
    answer = { ...drawnDraw(), slug: 'live' }
    await act(async () => {
      await vi.advanceTimersByTimeAsync(4_000)
    })
    const after = screen.getAllByRole('heading', { level: 2 }).map((heading) => heading.textContent)
    expect(after.slice(0, 3)).toEqual(['Time to the draw', 'Who won', 'The seal'])
    // Everything that stood there stands in the same order; what is new comes after it.
    const kept = before.filter((title) => !['Who wins', 'What has happened', 'Cautions'].includes(title ?? ''))
    expect(after.filter((title) => kept.includes(title)).slice(0, kept.length)).toEqual(kept)
    expect(after.indexOf('How it was settled')).toBeGreaterThan(after.indexOf('The terms'))
    expect(document.activeElement).toBe(screen.getByRole('link', { name: 'entries.csv' }))
    expect(screen.getAllByRole('status').map((status) => status.textContent)).toContain(
      'The draw is settled. The winners are on this page.',
    )
    for (const pick of answer.result?.picks.slice(0, 5) ?? [])
      expect(screen.getAllByText(pick.label ?? '').length).toBeGreaterThan(0)
  })
})

describe('how often the page asks', () => {
  it('seldom before the draw, at its time, then every two seconds; never once it is settled', () => {
    expect(pollingInterval(sealedDraw())).toBe(60_000)
    expect(pollingInterval(soon())).toBe(3_000)
    expect(pollingInterval(soon({ now: '2026-06-19T18:30:01Z' }))).toBe(2_000)
    const drawn = drawnDraw()
    expect(pollingInterval(drawn)).toBe(false)
    expect(pollingInterval({ ...drawn, result: drawn.result && { ...drawn.result, archive: null } })).toBe(5_000)
    expect(pollingInterval({ ...drawn, state: 'failed' })).toBe(false)
  })
})
