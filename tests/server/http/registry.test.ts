import { describe, expect, it } from 'vitest'
import { z } from 'zod'
import { type Actor, NOBODY, type Resource } from '#server/http/authorisation/actor.ts'
import type { Rule } from '#server/http/authorisation/decide.ts'
import { endpointRules } from '#server/http/authorisation/rules.ts'
import type { RequestContext } from '#server/http/endpoints/context.ts'
import { createRegistry, handle } from '#server/http/endpoints/registry.ts'
import { allEndpoints } from '#shared/schemas/api/all.ts'
import type { Endpoint } from '#shared/schemas/endpoint.ts'
import { Problem } from '#shared/schemas/problem.ts'

const rename = {
  name: 'rename',
  method: 'POST',
  path: '/api/things/:draw',
  summary: 'Rename a thing',
  params: z.object({ draw: z.uuid() }),
  query: z.object({ page: z.coerce.number().int().min(1).default(1) }),
  body: z.object({ name: z.string().min(1, 'Name it.'), prizes: z.array(z.object({ quantity: z.int() })).default([]) }),
  response: z.object({ name: z.string(), page: z.int() }),
} as const satisfies Endpoint

const ID = '8a1d4c9e-1f0b-4c8e-9a51-0d9a5a8d3f11'
const edit: Rule = { permission: 'edit', on: 'draw' }
const ours: Resource = { organisation: { id: 'o', slug: 'ours', state: 'approved' }, draw: { id: ID, witnesses: [] } }
const organiser: Actor = {
  person: { id: 'p', name: 'Ines', email: 'ines@group.example', administrator: false },
  memberships: [{ organisationId: 'o', role: 'organiser' }],
}
const context = (actor: Actor): RequestContext => ({
  actor,
  session: { id: null, start: async () => {}, end: async () => {} },
  address: '127.0.0.1',
  requestId: 'r',
})

let asked: string[] = []
const registry = (
  answer: unknown = { name: 'x', page: 1, passwordHash: 'secret' },
  rules: Record<string, Rule> = { rename: edit },
) =>
  createRegistry([rename], rules, [handle(rename, async () => answer as never)], async (on, key) => {
    asked.push(`${on} ${key}`)
    return key === ID ? ours : null
  })

const call = (
  input: Partial<{ params: unknown; query: unknown; body: unknown }>,
  actor = organiser,
  made = registry(),
) => made.call(rename, context(actor), { params: { draw: ID }, query: {}, body: { name: 'x' }, ...input })

const problemOf = async (calling: Promise<unknown>) => {
  const error = await calling.then(
    () => null,
    (thrown: unknown) => thrown,
  )
  if (!(error instanceof Problem)) throw error ?? new Error('no problem at all')
  return error.details
}

describe('createRegistry', () => {
  it('holds together with the rules and endpoints of this application', () => {
    const names = allEndpoints.map(({ name }) => name).sort()
    expect(Object.keys(endpointRules).sort()).toEqual(names)
  })

  it('refuses an endpoint without a handler, a handler or rule without an endpoint, and one of them twice', () => {
    const find = async () => null
    const handled = handle(rename, async () => ({ name: 'x', page: 1 }))
    const other = handle({ ...rename, name: 'other' }, async () => ({ name: 'x', page: 1 }))
    expect(() => createRegistry([rename], { rename: edit }, [], find)).toThrow('rename has no handler')
    expect(() => createRegistry([rename], {}, [handled], find)).toThrow('rename has no rule')
    expect(() => createRegistry([rename], { rename: edit, gone: edit }, [handled], find)).toThrow('The rule gone')
    expect(() => createRegistry([rename], { rename: edit }, [handled, handled], find)).toThrow('two handlers')
    expect(() => createRegistry([rename], { rename: edit }, [handled, other], find)).toThrow('belongs to no endpoint')
  })

  it('lets nothing out that the response does not name', async () => {
    expect(await call({})).toEqual({ name: 'x', page: 1 })
  })

  it('fails, and says so only inside, where an answer does not fit its description', async () => {
    await expect(call({}, organiser, registry({ name: 5, page: 1 }))).rejects.toThrow('does not fit its description')
  })

  it('asks strangers to sign in before it looks anything up', async () => {
    asked = []
    expect((await problemOf(call({}, NOBODY))).status).toBe(401)
    expect(asked).toEqual([])
  })

  it('decides before it reads the body', async () => {
    const outsider: Actor = { ...organiser, memberships: [] }
    expect((await problemOf(call({ body: { name: '' } }, outsider))).status).toBe(404)
  })

  it('finds nothing at a malformed id, without asking the database', async () => {
    asked = []
    expect((await problemOf(call({ params: { draw: "x' or true" } }))).status).toBe(404)
    expect(asked).toEqual([])
  })

  it('names each field at fault, with what to do', async () => {
    const details = await problemOf(call({ body: { name: '', prizes: [{ quantity: 1 }, { quantity: 1.5 }, {}] } }))
    expect(details).toMatchObject({
      status: 422,
      type: '/problems/invalid-fields',
      detail: '3 fields need another look.',
    })
    expect(details.errors).toEqual([
      { field: 'name', message: 'Name it.' },
      { field: 'prizes/1/quantity', message: 'Type a whole number.' },
      { field: 'prizes/2/quantity', message: 'Fill this in.' },
    ])
    expect(await problemOf(call({ query: { page: '0' } }))).toMatchObject({
      status: 400,
      errors: [{ field: 'page', message: 'The lowest value is 1.' }],
    })
    expect((await problemOf(call({ body: { prizes: [] } }))).errors).toEqual([
      { field: 'name', message: 'Fill this in.' },
    ])
  })
})
