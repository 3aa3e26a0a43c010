// What the tests of refusals share: archives with one breach, signed all the same, and the step that refuses them.
import { rmSync } from 'node:fs'
import { afterAll, beforeAll } from 'vitest'
import type { Changeable, Wanted } from './archives.ts'
import { type Json, unhex, utf8 } from './record.ts'
import { builtCheck, judge, put, scratch } from './run-check.ts'

export const base: Wanted = {
  seed: 'base',
  sources: 'both',
  rule: 'one-prize-each',
  entrants: 12,
  quantities: [2, 1],
  reserves: 2,
}
export const tossed: Wanted = { ...base, seed: 'tossed', sources: 'tossed' }
export const beaconOnly: Wanted = { ...base, seed: 'beacon', sources: 'beacon' }
export const tossesOnly: Wanted = { ...base, seed: 'tosses', sources: 'tosses' }

/** A change to a seal or a result, and the place that the check must name. */
export type Row = [wanted: Wanted, what: string, change: (value: Changeable) => void, where: string]
export const named = (rows: Row[]) => rows.map(([wish, what, change, where]) => ({ wish, what, change, where }))

/** The object or list that stands under these names. */
export function inside(value: Changeable, ...names: (string | number)[]): Changeable {
  let at: Json = value
  for (const name of names) at = (at as Record<string | number, Json>)[name] ?? null
  return at as Changeable
}

/** A SubjectPublicKeyInfo PEM of an Ed25519 key. */
export const pem = (key: Uint8Array): Buffer => {
  const der = Buffer.concat([unhex('302a300506032b6570032100'), key])
  return utf8(`-----BEGIN PUBLIC KEY-----\n${der.toString('base64')}\n-----END PUBLIC KEY-----\n`)
}

/** A judge with a scratch folder, for the test file that calls this: "holds", or the step and the place of the failure. */
export function refusals() {
  let folder = ''
  let next = 0
  beforeAll(() => {
    folder = scratch()
    builtCheck()
  })
  afterAll(() => rmSync(folder, { recursive: true }))
  const file = (name: string, bytes: Uint8Array): string => put(folder, name, bytes)
  const outcomeOf = (zip: Uint8Array, ...others: string[]) =>
    judge('--test-beacon', file(`${next++}.zip`, zip), ...others)
  const step = async (zip: Uint8Array, ...others: string[]): Promise<string> => {
    const outcome = await outcomeOf(zip, ...others)
    return outcome.ok ? 'holds' : `${outcome.step} ${outcome.where}`
  }
  return { file, outcomeOf, step }
}
