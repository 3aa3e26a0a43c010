import { createHash } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { z } from 'zod'
import { parseSeal } from '#shared/protocol/seal.ts'
import { checkReceipt, parseReceipt } from '#shared/protocol/receipt.ts'
import { explainCoin } from '#shared/sampling/coin.ts'
import { allEndpoints } from '#shared/schemas/api/all.ts'
import { INCLUSION_EXAMPLE, SEAL_EXAMPLE, TRANSCRIPT_EXAMPLE } from '#shared/schemas/api/v1-examples.ts'
import * as v1 from '#shared/schemas/api/v1.ts'
import { openApiDocument } from '#shared/schemas/openapi.ts'
import { isPublicEndpoint, type PublicEndpoint } from '#shared/schemas/public-endpoint.ts'

/**
 * The rules are those of the OpenAPI Specification 3.1.1 (spec.openapis.org/oas/v3.1.1.html), sections named beside them,
 * from memory; schemas are JSON Schema 2020-12.
 */
type Json = Record<string, unknown>
interface Parameter {
  readonly name: string
  readonly in: string
  readonly required: boolean
  readonly schema: Json
  readonly example?: unknown
}
interface Operation {
  readonly operationId: string
  readonly summary: string
  readonly parameters: readonly Parameter[]
  readonly responses: Record<
    string,
    { $ref?: string; description?: string; content?: Record<string, { schema: Json }> }
  >
}
interface Description extends Json {
  readonly paths: Record<string, { get: Operation }>
  readonly components: { schemas: Record<string, Json>; responses: Record<string, Json> }
}

// As a reader gets it: whatever JSON cannot hold is lost.
const document = JSON.parse(
  JSON.stringify(openApiDocument(allEndpoints, { origin: 'https://draws.example', version: '0.1.0' })),
) as Description
const endpoints: PublicEndpoint[] = allEndpoints.filter(isPublicEndpoint)
const operations = Object.entries(document.paths).map(([path, { get }]) => ({ path, get }))

function* nodesOf(value: unknown, at = '#'): Generator<[string, Json]> {
  if (typeof value !== 'object' || value === null) return
  if (!Array.isArray(value)) yield [at, value as Json]
  for (const [key, below] of Object.entries(value)) yield* nodesOf(below, `${at}/${key}`)
}
const resolve = (ref: string) =>
  ref
    .slice(2)
    .split('/')
    .reduce<unknown>((at, key) => (at as Json | undefined)?.[key], document)

describe('the public description', () => {
  it('has what an OpenAPI 3.1 document must have (4.8.1, 4.8.2)', () => {
    expect(document.openapi).toMatch(/^3\.1\.\d+$/)
    expect(document.info).toMatchObject({ title: expect.any(String), version: expect.stringMatching(/^1\./) })
    expect(document.servers).toEqual([{ url: 'https://draws.example' }])
    const allowed = ['openapi', 'info', 'jsonSchemaDialect', 'servers', 'paths', 'webhooks', 'components', 'security']
    expect(Object.keys(document).filter((key) => ![...allowed, 'tags', 'externalDocs'].includes(key))).toEqual([])
    for (const name of Object.keys(document.components.schemas)) expect(name).toMatch(/^[a-zA-Z0-9._-]+$/)
  })

  it('has every public endpoint, and nothing that needs a session', () => {
    const ours = endpoints.filter((one) => (Object.values(v1) as unknown[]).includes(one))
    expect(ours.length).toBeGreaterThan(5)
    for (const { name, path } of ours) {
      expect(document.paths[path.replace(/:(\w+)/g, '{$1}')]?.get.operationId).toBe(name)
    }
    expect(operations.map(({ get }) => get.operationId).sort()).toEqual(endpoints.map(({ name }) => name).sort())
    for (const { path } of operations) expect(path).toMatch(/^\/api\/v1\//)
    // Every endpoint under the public address has to say how it may be kept, or it would be left out unseen.
    expect(allEndpoints.filter(({ path }) => path.startsWith('/api/v1/'))).toEqual(endpoints)
  })

  it('names operations once, and each parameter of a path in its operation and back (4.8.10, 4.8.12)', () => {
    const ids = operations.map(({ get }) => get.operationId)
    expect(new Set(ids).size).toBe(ids.length)
    for (const { path, get } of operations) {
      const inPath = [...path.matchAll(/\{(\w+)\}/g)].map((match) => match[1])
      expect(get.parameters.filter((one) => one.in === 'path').map(({ name }) => name)).toEqual(inPath)
      for (const one of get.parameters) {
        expect(['path', 'query']).toContain(one.in)
        if (one.in === 'path') expect(one.required).toBe(true)
        expect(one.schema).toEqual(expect.any(Object))
      }
      expect(new Set(get.parameters.map((one) => `${one.in} ${one.name}`)).size).toBe(get.parameters.length)
    }
  })

  it('describes each response, with problem details for what goes wrong (4.8.16, 4.8.17)', () => {
    for (const { get } of operations) {
      expect(Object.keys(get.responses)).toEqual(expect.arrayContaining(['200', '304', 'default']))
      if (get.parameters.some((one) => one.in === 'path')) expect(get.responses['404']).toBeDefined()
      for (const [status, response] of Object.entries(get.responses)) {
        expect(status).toMatch(/^([1-5]\d\d|default)$/)
        const whole = (response.$ref ? resolve(response.$ref) : response) as { description?: string }
        expect(whole.description).toMatch(/\.$/)
      }
    }
    expect(document.components.responses.Problem).toMatchObject({
      content: { 'application/problem+json': { schema: { $ref: '#/components/schemas/Problem' } } },
    })
  })

  it('leads every reference to something, and closes no object to fields of later versions', () => {
    let references = 0
    for (const [at, node] of nodesOf(document)) {
      if (at.includes('/example')) continue
      if (typeof node.$ref === 'string') {
        references += 1
        expect(resolve(node.$ref), `${at}: ${node.$ref}`).toBeDefined()
      }
      expect(node, at).not.toHaveProperty('$schema')
      expect(node, at).not.toHaveProperty('$id')
      expect(node.additionalProperties, at).not.toBe(false)
    }
    expect(references).toBeGreaterThan(20)
  })

  it.each(endpoints.map((one) => [one.name, one] as const))(
    'gives an example of %s that fits its schemas',
    (_, one) => {
      const { example } = one
      expect(
        one.params.parse(Object.fromEntries(Object.entries(example.params).map(([k, v]) => [k, String(v)]))),
      ).toEqual(example.params)
      expect(one.query.parse(example.query)).toEqual(example.query)
      // Parsed and whole: a member that the schema does not know would be stripped.
      expect(one.response.parse(example.response)).toEqual(example.response)
      const path = document.paths[one.path.replace(/:(\w+)/g, '{$1}')]
      const media = path?.get.responses['200']?.content?.['application/json'] as { schema: Json; example: unknown }
      expect(media.example).toEqual(example.response)
      // The published schema, read on its own, takes it, and refuses it with a member missing.
      const schema = z.fromJSONSchema({
        ...(JSON.parse(JSON.stringify(media.schema).replaceAll('#/components/schemas/', '#/$defs/')) as Json),
        $schema: 'https://json-schema.org/draft/2020-12/schema',
        $defs: JSON.parse(
          JSON.stringify(document.components.schemas).replaceAll('#/components/schemas/', '#/$defs/'),
        ) as Record<string, never>,
      } as never)
      expect(schema.safeParse(example.response).error).toBeUndefined()
      for (const key of Object.keys(example.response as Json)) {
        const { [key]: _gone, ...rest } = example.response as Json
        expect(schema.safeParse(rest).success, `without ${key}`).toBe(false)
      }
    },
  )

  it('has examples that hold by the rules of the record', () => {
    const sha256 = (bytes: Uint8Array) => new Uint8Array(createHash('sha256').update(bytes).digest())
    const bytes = new TextEncoder().encode(SEAL_EXAMPLE.signed)
    expect(Buffer.from(sha256(bytes)).toString('hex')).toBe(SEAL_EXAMPLE.digest)
    const seal = parseSeal(bytes)
    if (!seal.ok) throw new Error(JSON.stringify(seal.error))
    const proof = parseReceipt(new TextEncoder().encode(JSON.stringify(INCLUSION_EXAMPLE)))
    if (!proof.ok) throw new Error(JSON.stringify(proof.error))
    expect(checkReceipt(sha256, proof.value, seal.value, SEAL_EXAMPLE.digest).ok).toBe(true)
    for (const { left, right, flips, side } of TRANSCRIPT_EXAMPLE.items.flatMap(({ coins }) => [...coins])) {
      const last = explainCoin(left, left + right, flips).at(-1)
      expect(last?.digit === 1 ? 'H' : 'T').toBe(side)
    }
  })
})
