import { expect, test } from 'vitest'
import { eventMeaning, eventTitle } from '#shared/log/event-words.ts'

test('a list that opens again is told from one that opens, by the reason that only the former has', () => {
  expect(eventTitle({ event: 'opened', note: null })).toBe('Opened')
  const again = { event: 'opened', note: 'Two stub books came late.' }
  expect([eventTitle(again), eventMeaning(again)]).toEqual(['Reopened', 'The promoter opened the list again.'])
  expect(eventTitle({ event: 'cancelled', note: 'The hall burnt down.' })).toBe('Cancelled')
})

test('an event that is not known stands under its own name', () => {
  expect([eventTitle({ event: 'moved', note: null }), eventMeaning({ event: 'moved', note: null })]).toEqual([
    'moved',
    '',
  ])
})
