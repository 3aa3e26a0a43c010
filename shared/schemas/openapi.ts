import { z } from 'zod'
import { v1Shapes } from './api/v1.ts'
import type { Endpoint } from './endpoint.ts'
import { problemSchema } from './problem.ts'
import { isPublicEndpoint, type PublicEndpoint } from './public-endpoint.ts'

type Json = Readonly<Record<string, unknown>>

const SCHEMAS = '#/components/schemas/'

/**
 * The public API in the words of OpenAPI 3.1.1, made from the schemas that parse and strip its calls. Fields that a later
 * minor version adds are allowed for: no object is closed.
 */
export function openApiDocument(
  endpoints: readonly Endpoint[],
  site: { readonly origin: string; readonly version: string },
): Json {
  const named = namedSchemas()
  return {
    openapi: '3.1.1',
    info: {
      title: 'Evenpenny public API',
      version: '1.0.0',
      description:
        'Read what is public about prize draws: draws, seals, results, coins and proofs. No key is needed and nothing can be written. Within version 1 fields may be added; none is taken away or changes its meaning.',
    },
    externalDocs: { description: 'Files, formats and how to check them', url: `${site.origin}/developers` },
    servers: [{ url: site.origin }],
    security: [],
    tags: [{ name: 'draws' }, { name: 'seals' }, { name: 'log' }],
    paths: pathsOf(endpoints.filter(isPublicEndpoint), named.registry),
    components: {
      schemas: named.schemas,
      responses: {
        NotModified: { description: 'What you have by this entity tag still holds.' },
        Problem: {
          description: 'What is wrong and what to do, as RFC 9457 problem details.',
          content: {
            'application/problem+json': {
              schema: { $ref: `${SCHEMAS}Problem` },
              example: {
                type: 'about:blank',
                title: 'Not Found',
                status: 404,
                detail: 'There is nothing at this address.',
                instance: '/api/v1/draws/no-such-draw',
              },
            },
          },
        },
      },
    },
  }
}

type Names = ReturnType<typeof namedSchemas>['registry']

function namedSchemas() {
  const registry = z.registry<{ id: string }>()
  for (const [id, shape] of Object.entries({ ...v1Shapes, Problem: problemSchema })) registry.add(shape, { id })
  const made = z.toJSONSchema(registry, { io: 'input', uri: (id) => `${SCHEMAS}${id}` })
  const schemas = Object.fromEntries(Object.entries(made.schemas).map(([id, schema]) => [id, bare(schema)]))
  return { registry, schemas }
}

/** A schema inside the description stands in its dialect, under the name that the description gives it. */
function bare(schema: Json): Json {
  return Object.fromEntries(Object.entries(schema).filter(([key]) => key !== '$schema' && key !== '$id'))
}

function schemaOf(schema: z.ZodType, names: Names): Json {
  const known = names.get(schema)
  return known ? { $ref: SCHEMAS + known.id } : bare(z.toJSONSchema(schema, { io: 'input' }))
}

function pathsOf(endpoints: readonly PublicEndpoint[], names: Names): Json {
  return Object.fromEntries(
    endpoints.map((endpoint) => [
      endpoint.path.replace(/:([a-zA-Z]+)/g, '{$1}'),
      { get: operationOf(endpoint, names) },
    ]),
  )
}

function operationOf(endpoint: PublicEndpoint, names: Names): Json {
  const problem = { $ref: '#/components/responses/Problem' }
  const query = parametersOf(endpoint, 'query')
  const path = parametersOf(endpoint, 'path')
  return {
    operationId: endpoint.name,
    summary: endpoint.summary,
    description: endpoint.description,
    tags: [endpoint.path.split('/')[3] ?? 'draws'],
    parameters: [...path, ...query],
    responses: {
      200: {
        description:
          endpoint.caching === 'immutable'
            ? 'Found. This answer never changes: keep it as long as you like.'
            : 'Found. Ask again with If-None-Match before you use it anew.',
        headers: {
          ETag: { description: 'Entity tag of this answer.', schema: { type: 'string' } },
          'Cache-Control': { description: 'How long it may be kept.', schema: { type: 'string' } },
        },
        content: {
          'application/json': { schema: schemaOf(endpoint.response, names), example: endpoint.example.response },
        },
      },
      304: { $ref: '#/components/responses/NotModified' },
      ...(query.length > 0 ? { 400: problem } : {}),
      ...(path.length > 0 ? { 404: problem } : {}),
      default: problem,
    },
  }
}

function parametersOf(endpoint: PublicEndpoint, place: 'path' | 'query'): Json[] {
  const schema = bare(z.toJSONSchema(place === 'path' ? endpoint.params : endpoint.query, { io: 'input' }))
  const required = (schema.required ?? []) as readonly string[]
  const example: Json = place === 'path' ? endpoint.example.params : endpoint.example.query
  return Object.entries((schema.properties ?? {}) as Readonly<Record<string, Json>>).map(([name, of]) => {
    const { description, ...rest } = of
    return {
      name,
      in: place,
      required: place === 'path' || required.includes(name),
      ...(description === undefined ? {} : { description }),
      schema: rest,
      ...(name in example ? { example: example[name] } : {}),
    }
  })
}
