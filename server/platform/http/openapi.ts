/** The OpenAPI 3.1 document, made from the endpoint values themselves. */
import { z } from 'zod'
import { allEndpoints, type NamedEndpoint } from '../../../shared/contract/all.ts'
import { ProblemBody } from '../../../shared/problems.ts'

type Json = Record<string, unknown>

const schemaOf = (schema: z.ZodType, io: 'input' | 'output'): Json =>
  z.toJSONSchema(schema, { io, unrepresentable: 'any' }) as Json

function parametersOf(schema: z.ZodType | undefined, place: 'path' | 'query'): Json[] {
  if (!schema) return []
  const { properties = {}, required = [] } = schemaOf(schema, 'input') as {
    properties?: Record<string, Json>
    required?: string[]
  }
  return Object.entries(properties).map(([name, each]) => ({
    name,
    in: place,
    required: place === 'path' || required.includes(name),
    schema: each,
  }))
}

function requestBody({ endpoint }: NamedEndpoint): Json {
  if (!endpoint.body) return {}
  const schema = schemaOf(endpoint.body, 'input')
  if (endpoint.bodyKind !== 'upload') {
    return { requestBody: { required: true, content: { 'application/json': { schema } } } }
  }
  const properties = { ...(schema['properties'] as Json), file: { type: 'string', contentMediaType: 'text/csv' } }
  return { requestBody: { required: true, content: { 'multipart/form-data': { schema: { ...schema, properties } } } } }
}

function operation(named: NamedEndpoint): Json {
  const { endpoint, name, noun } = named
  return {
    operationId: name,
    tags: [noun],
    summary: endpoint.summary,
    description: endpoint.access === 'public' ? 'Anybody may call this.' : `Access: ${endpoint.access}.`,
    ...(endpoint.access === 'public' ? { security: [] } : {}),
    parameters: [...parametersOf(endpoint.params, 'path'), ...parametersOf(endpoint.query, 'query')],
    ...requestBody(named),
    responses: {
      200: {
        description: 'Done',
        content: endpoint.response
          ? { 'application/json': { schema: schemaOf(endpoint.response, 'output') } }
          : { [endpoint.produces ?? 'application/octet-stream']: { schema: { type: 'string' } } },
      },
      default: {
        description: 'Refused',
        content: { 'application/problem+json': { schema: { $ref: '#/components/schemas/Problem' } } },
      },
    },
  }
}

export function openApiDocument(publicUrl: string): Json {
  const paths: Record<string, Json> = {}
  for (const named of allEndpoints) {
    const path = named.endpoint.path.replace(/:(\w+)/g, '{$1}')
    paths[path] = { ...paths[path], [named.endpoint.method.toLowerCase()]: operation(named) }
  }
  return {
    openapi: '3.1.0',
    info: { title: 'Evenburn', version: '0.1.0', description: 'Everything the pages do, over HTTP.' },
    servers: [{ url: publicUrl }],
    security: [{ accessToken: [] }, { session: [] }],
    paths,
    components: {
      securitySchemes: {
        accessToken: { type: 'http', scheme: 'bearer' },
        session: { type: 'apiKey', in: 'cookie', name: 'evenburn_session' },
      },
      schemas: { Problem: schemaOf(ProblemBody, 'output') },
    },
  }
}
