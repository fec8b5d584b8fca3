/** Everything that leaves: it says draft while it is one, carries its checksum, and reads back. */
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { tableToCsv } from '../../server/core/formats/table-csv.ts'
import { readTable } from '../../server/core/tables/read-table.ts'
import {
  checkReadBack,
  exportCells,
  exportChangeSheet,
  exportProvenance,
  exportTable,
} from '../../shared/contract/exports.ts'
import { sendBack, signOff, submitRevision } from '../../shared/contract/reviews.ts'
import { bringTable, markFlashed, type Revision } from '../../shared/contract/tables.ts'
import { listAudit } from '../../shared/contract/accounts.ts'
import { pagesOfPdf } from '../support/pdf.ts'
import { aWorkshop, startServer, type Crew, type TestServer } from '../support/server.ts'
import { aVehicle } from '../support/vehicle.ts'

let server: TestServer
let crew: Crew
let vehicleId: string
let target: Revision
let draft: Revision
let signed: Revision

/** A later table of the same axes: every fifth cell a little richer. */
const values = [...flatbed.flashed].map((value, cell) => (cell % 5 === 0 ? value + 1.5 : value))
const csv = (cells: ArrayLike<number>) =>
  tableToCsv({ grid: flatbed.grid, values: cells, axes: 'rpm-across', decimal: 'point', remarks: [] })

const bring = async (text: string) =>
  (
    await crew.tuner.call(bringTable, {
      params: { vehicleId },
      body: { kind: 've', text, origin: 'paste', note: 'a “note”, ends', inEngine: false },
    })
  ).body

beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'exports')
  const made = await aVehicle(server, crew)
  vehicleId = made.vehicle.id
  target = made.target
  const second = await bring(csv(values))
  const params = { revisionId: second.id }
  await crew.tuner.call(submitRevision, { params, body: { note: '' } })
  signed = (
    await crew.reviewer.call(signOff, {
      params,
      body: { name: crew.reviewer.name, checksum: second.checksum, note: 'Looked at it.' },
    })
  ).body
  draft = await bring(csv(values.map((value, cell) => (cell === 7 ? value + 3 : value))))
})
afterAll(() => server.close())

const pdfOf = async (revision: Revision) => {
  const answer = await fetch(`${server.url}${exportChangeSheet.path.replace(':revisionId', revision.id)}`, {
    headers: crew.tuner.headers,
  })
  return { answer, pages: await pagesOfPdf(new Uint8Array(await answer.arrayBuffer())) }
}

describe('a draft', () => {
  test('says so in its CSV, its JSON, its cells and its file names', async () => {
    const params = { revisionId: draft.id }
    const table = await crew.tuner.call(exportTable, { params })
    expect(table.text.split('\r\n')[0]).toMatch(/# DRAFT, NOT SIGNED/)
    expect(table.headers.get('content-disposition')).toMatch(/-DRAFT\.csv/)
    const json = await crew.tuner.call(exportProvenance, { params })
    expect((JSON.parse(json.text) as { stateInWords: string }).stateInWords).toBe('DRAFT, NOT SIGNED')
    expect(json.headers.get('content-disposition')).toMatch(/-DRAFT\.json/)
    expect((await crew.tuner.call(exportCells, { params })).body.text).toMatch(/^"# DRAFT, NOT SIGNED/)
  })

  test('says so on every page of its change sheet; a signed one on none', async () => {
    const unsigned = await pdfOf(draft)
    expect(unsigned.answer.headers.get('content-disposition')).toMatch(/-DRAFT\.pdf/)
    expect(unsigned.pages.length).toBeGreaterThan(1)
    for (const page of unsigned.pages) expect(page).toMatch(/DRAFT, NOT SIGNED[\s\S]*Draft, not signed/)
    expect(unsigned.pages.join(' ')).toContain('Reviewed: not signed')
    const done = await pdfOf(signed)
    for (const page of done.pages) expect(page).not.toMatch(/draft/i)
  })

  test('is still a draft while it waits and when it was sent back', async () => {
    const waiting = await bring(csv(values.map((value, cell) => (cell === 9 ? value + 3 : value))))
    await crew.tuner.call(submitRevision, { params: { revisionId: waiting.id }, body: { note: '' } })
    for (const page of (await pdfOf(waiting)).pages) expect(page).toContain('DRAFT, NOT SIGNED (waits for review)')
    await crew.reviewer.call(sendBack, { params: { revisionId: waiting.id }, body: { note: 'not yet' } })
    for (const page of (await pdfOf(waiting)).pages) expect(page).toContain('DRAFT, NOT SIGNED (sent back)')
  })
})

describe('the change sheet of a signed revision', () => {
  test('carries every value, every change, the signer, the checksum and the cautions', async () => {
    const { pages, answer } = await pdfOf(signed)
    expect(answer.headers.get('content-type')).toBe('application/pdf')
    const words = pages.join(' ')
    const shown = words.match(/\d+\.\d/g) ?? []
    for (const value of signed.values) expect(shown).toContain(value!.toFixed(1))
    signed.values.forEach((after, cell) => {
      const before = signed.parentValues![cell]!
      if (after !== before) expect(words).toContain(`${before.toFixed(1)} to ${after!.toFixed(1)}`)
    })
    expect(words).toContain(`Signed by ${crew.reviewer.name}`)
    expect(words).toContain(signed.checksum)
    expect(words).toContain('can destroy an engine')
    expect(words).toContain('With the signature: “Looked at it.”')
    const sum = signed.values.reduce<number>((total, value) => total + value!, 0)
    expect(words).toContain(sum.toFixed(1))
  })
})

describe('round trips through the API', () => {
  const again = (text: string, kind: 've' | 'target' = 've') =>
    crew.tuner.call(checkReadBack, { params: { vehicleId }, body: { text, kind } })

  test.each([
    {},
    { axes: 'rpm-down' as const, decimal: 'comma' as const, map: 'psi' as const },
    { places: 1, map: 'bar' as const },
  ])('the CSV with %j brings back the same bits when it is brought as a table', async (query) => {
    const file = await crew.owner.call(exportTable, { params: { revisionId: signed.id }, query })
    const back = await bring(file.text)
    expect(back.checksum).toBe(signed.checksum)
    expect(back.cellsChanged).toBeGreaterThan(0)
  })

  test('the JSON and the cells for the clipboard bring back the same bits', async () => {
    const params = { revisionId: signed.id }
    expect((await bring((await crew.owner.call(exportProvenance, { params })).text)).checksum).toBe(signed.checksum)
    expect((await bring((await crew.owner.call(exportCells, { params })).body.text)).checksum).toBe(signed.checksum)
  })

  test('the JSON holds what stands behind the revision', async () => {
    const file = await crew.owner.call(exportProvenance, { params: { revisionId: signed.id } })
    const body = JSON.parse(file.text) as Record<string, unknown>
    expect(body).toMatchObject({
      checksum: signed.checksum,
      parent: { number: 1, state: 'draft' },
      signature: { by: { name: crew.reviewer.name }, byAuthor: false },
      review: { history: [{ move: 'submit' }, { move: 'sign off' }] },
    })
  })

  test('targets leave as lambda or as AFR, and the AFR file is the target table again', async () => {
    const params = { revisionId: target.id }
    const lambda = await crew.tuner.call(exportTable, { params })
    expect((await again(lambda.text, 'target')).body.matches?.number).toBe(1)
    const afr = await crew.tuner.call(exportTable, { params, query: { target: 'afr', places: 2 } })
    expect(afr.text).toContain(`target AFR at a stoichiometric ratio of ${flatbed.sheet.stoichAfr}`)
    const read = readTable(afr.text, { kind: 'target', stoichAfr: flatbed.sheet.stoichAfr })
    expect(read.ok && read.values[0]).toBeCloseTo(flatbed.target[0]!, 2)
    expect((await again(afr.text, 'target')).body.matches?.number).toBe(1)
  })

  test('a read-back with one cell off names rpm, kPa and both values', async () => {
    const off = [...values]
    off[14] = 12.5
    const answer = (await again(csv(off))).body
    expect(answer.matches).toBeNull()
    const cols = flatbed.grid.rpm.length
    expect(answer.closest?.differ).toEqual([
      {
        cell: 14,
        rpm: flatbed.grid.rpm[14 % cols],
        mapKpa: flatbed.grid.mapKpa[Math.floor(14 / cols)],
        expected: values[14],
        found: 12.5,
      },
    ])
  })

  test('an owner’s read-back is compared with what an owner may see', async () => {
    const text = (await crew.tuner.call(exportTable, { params: { revisionId: draft.id } })).text
    const body = { text, kind: 've' as const }
    expect((await crew.tuner.call(checkReadBack, { params: { vehicleId }, body })).body.matches?.id).toBe(draft.id)
    expect((await crew.owner.call(checkReadBack, { params: { vehicleId }, body })).body.closest?.id).toBe(signed.id)
  })
})

describe('what is in the engine', () => {
  test('when nobody has signed it, then it is refused until that is said, and the audit trail says it too', async () => {
    const params = { revisionId: draft.id }
    for (const body of [{}, { unsigned: false }]) {
      const refused = await crew.tuner.call(markFlashed, { params, body: body as { unsigned: boolean } })
      expect(refused.status).toBe(409)
      expect(refused.problem?.type).toMatch(/not-signed$/)
    }
    expect((await crew.tuner.call(markFlashed, { params, body: { unsigned: true } })).body.flashed).toBe(true)
    const { entries } = (await crew.reviewer.call(listAudit, { query: { action: 'revision.flash' } })).body
    expect(entries[0]?.subject).toBe(`Revision ${draft.number}, not signed`)
  })

  test('when it is signed, then it is recorded without further words', async () => {
    const answer = await crew.tuner.call(markFlashed, { params: { revisionId: signed.id }, body: { unsigned: false } })
    expect(answer.body.flashed).toBe(true)
  })
})
