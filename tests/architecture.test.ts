/** The rule of dependence, executed: who may import whom, by folder name, so that a new feature is guarded at once. */
import { existsSync, readdirSync, readFileSync, statSync } from 'node:fs'
import { dirname, join, relative, resolve } from 'node:path'
import { describe, expect, test } from 'vitest'

const nouns = ['accounts', 'vehicles', 'notices', 'tables', 'logs', 'proposals', 'reviews', 'exports']
/** The bench and the shell stand above the nouns in the client: they gather what all of them know. */
const gathering = 'bench'

const filesBelow = (path: string): string[] =>
  readdirSync(path).flatMap((name) => {
    const inside = join(path, name)
    return statSync(inside).isDirectory() ? filesBelow(inside) : /\.(ts|tsx|mjs)$/.test(name) ? [inside] : []
  })

const importsOf = (path: string): string[] =>
  [...readFileSync(path, 'utf8').matchAll(/(?:from|import)\s*\(?\s*['"]([^'"\n]+)['"]/g)].map((match) => match[1]!)

type Edge = readonly [from: string, to: string]
const root = resolve('.')
const edgeOf = (from: string, specifier: string): Edge => [
  from,
  specifier.startsWith('.') ? relative(root, resolve(root, dirname(from), specifier)) : specifier,
]

const featureOf = (path: string) => /^(?:server|src)\/features\/([^/]+)\//.exec(path)?.[1] ?? null

/** Why an import is not allowed, or null. */
export function fault([from, to]: Edge): string | null {
  const inside = (zone: string) => from.startsWith(zone)
  const reaches = (...zones: string[]) => zones.some((zone) => to.startsWith(zone))
  if (
    inside('shared/') &&
    (reaches('server/', 'src/', 'tests/', 'node:', 'react') || (!to.startsWith('shared/') && to !== 'zod'))
  )
    return 'shared is pure'
  if (inside('src/') && reaches('server/', 'node:')) return 'the client does not know the server'
  if (inside('server/') && reaches('src/')) return 'the server does not know the client'
  if (
    inside('server/core/') &&
    reaches('server/platform', 'server/features', 'server/learner', 'server/app', 'server/deps', 'node:')
  )
    return 'the core does no I/O'
  if (inside('server/platform/') && reaches('server/features')) return 'the platform does not know the domain'
  if ((inside('src/ui/') || inside('src/lib/')) && reaches('src/features')) return 'parts do not know pages'
  if (inside('sample-logs/') && reaches('server/')) return 'the simulator does not share the learner’s code'
  const own = featureOf(from)
  const other = featureOf(to)
  if (own && other && own !== other) {
    if (inside('server/')) {
      if (nouns.indexOf(other) > nouns.indexOf(own)) return 'a noun uses earlier nouns only'
      if (!/\/service\.ts$/.test(to)) return 'another noun is used by its service only'
    }
    // In the client, two small parts are shared downward: the mark in the head, and a query file of any noun.
    if (inside('src/') && own !== gathering && !/\/(queries|log-word|vehicle-row|brand)\.tsx?$/.test(to))
      return 'a page uses another noun by its queries only'
  }
  return null
}

const files = ['shared', 'server', 'src', 'sample-logs'].flatMap(filesBelow)

describe('the rule of dependence', () => {
  test('every import keeps it', () => {
    const faults = files.flatMap((path) =>
      importsOf(path).flatMap((specifier) => {
        const edge = edgeOf(path, specifier)
        const why = fault(edge)
        return why ? [`${edge[0]} -> ${edge[1]}: ${why}`] : []
      }),
    )
    expect(faults).toEqual([])
  })

  test.each([
    ['server/core/learn.ts', 'server/platform/db/client.ts'],
    ['server/core/learn.ts', 'node:fs'],
    ['server/features/vehicles/service.ts', 'server/features/logs/service.ts'],
    ['server/features/logs/service.ts', 'server/features/tables/store.ts'],
    ['src/ui/button.tsx', 'src/features/logs/log-page.tsx'],
    ['src/lib/api.ts', 'server/deps.ts'],
    ['shared/grid.ts', 'node:path'],
    ['sample-logs/simulator/simulate.ts', 'server/core/learn.ts'],
  ])('the planted edge %s -> %s is caught', (from, to) => expect(fault([from, to])).not.toBeNull())

  test.each([
    ['server/features/logs/service.ts', 'server/features/vehicles/service.ts'],
    ['server/core/learn.ts', 'shared/grid.ts'],
  ])('the legal edge %s -> %s passes', (from, to) => expect(fault([from, to])).toBeNull())

  test('every folder of a feature is a noun of the list, and no noun is missing', () => {
    expect(readdirSync('server/features').sort()).toEqual([...nouns].sort())
    expect(
      readdirSync('src/features')
        .filter((name) => name !== gathering)
        .sort(),
    ).toEqual([...nouns].sort())
  })

  test('the core and what is shared read no clock and draw no lots', () => {
    const pure = files.filter((path) => path.startsWith('shared/') || path.startsWith('server/core/'))
    const guilty = pure.filter((path) =>
      /Math\.random|Date\.now|new Date\(\)|performance\.now|console\./.test(readFileSync(path, 'utf8')),
    )
    expect(guilty).toEqual([])
  })

  // The compiler does not see these in the core: the CSV reader's types bring Node's along.
  test('the core and what is shared use no global of Node', () => {
    const pure = files.filter((path) => path.startsWith('shared/') || path.startsWith('server/core/'))
    const nodeGlobal =
      /\bprocess\.[a-z]|\bBuffer\.[a-z]|\b(?:setTimeout|setInterval|setImmediate|require)\(|\b__dirname\b/
    expect(pure.filter((path) => nodeGlobal.test(readFileSync(path, 'utf8')))).toEqual([])
    expect('const bytes = Buffer.from(text)').toMatch(nodeGlobal)
  })

  test('no file is named for a drawer', () => {
    const drawers = /(^|\/)(utils?|helpers?|misc|common|manager|types|constants)\.(ts|tsx)$/
    expect(files.filter((path) => drawers.test(path))).toEqual([])
  })

  test('every relative import leads to a file', () => {
    const lost = files.flatMap((path) =>
      importsOf(path)
        .filter((each) => each.startsWith('.') && !existsSync(resolve(dirname(path), each)))
        .map((each) => `${path}: ${each}`),
    )
    expect(lost).toEqual([])
  })
})
