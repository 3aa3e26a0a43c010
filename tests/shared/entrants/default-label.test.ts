import { expect, it } from 'vitest'
import { defaultLabel } from '#shared/entrants/default-label.ts'

it.each([
  ['Marta Quillon', 'Marta Q.'],
  ['Marta  Elena de la Quillon', 'Marta Q.'],
  ['Quillon, Marta', 'Marta Q.'],
  ['Marta', 'Marta'],
  ['Anne-Lise O’Dwyer', 'Anne-Lise O.'],
  ['Björn Åkesson', 'Björn Å.'],
  ['李 小龙', '李 小.'],
  ['Team (Blue)', 'Team B.'],
  ['Marta ???', 'Marta'],
])('%s is announced as %s', (name, label) => {
  expect(defaultLabel(name)).toBe(label)
})
