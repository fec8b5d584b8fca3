/** Use cases of what leaves the product and what comes back from the controller. */
import type { ReadBack, TableForm } from '../../../shared/contract/exports.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { fromWire } from '../../../shared/wire.ts'
import { tableToCsv } from '../../core/formats/table-csv.ts'
import { readTable } from '../../core/tables/read-table.ts'
import type { Deps } from '../../deps.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import type { FileAnswer } from '../../platform/http/on.ts'
import { Problem } from '../../platform/http/problem.ts'
import { workshopSettings } from '../accounts/service.ts'
import { getReview } from '../reviews/service.ts'
import { getRevision, tableById, tablesOf } from '../tables/service.ts'
import { currentSheet, vehicleInScope } from '../vehicles/service.ts'
import { drawChangeSheet } from './change-sheet.ts'
import { compareReadBack } from './read-back.ts'
import { cautions, fileName, instantWords, stateWords, tableName } from './words.ts'

/** AFR never reads back to the same double, so it has a stated precision: two places unless said otherwise. */
const afrPlaces = 2

async function inScope(deps: Deps, actor: Actor, revisionId: string) {
  const revision = await getRevision(deps.db, scopeOf(actor), revisionId)
  return { revision, vehicle: await vehicleInScope(deps.db, scopeOf(actor), revision.vehicleId) }
}

const stoichOf = async (deps: Deps, vehicleId: string): Promise<number> =>
  (await currentSheet(deps.db, vehicleId))?.stoichAfr ?? 14.7

async function tableText(deps: Deps, actor: Actor, revisionId: string, form: TableForm, tabs: boolean) {
  const { revision, vehicle } = await inScope(deps, actor, revisionId)
  const asAfr = revision.kind === 'target' && form.target === 'afr'
  const stoichAfr = asAfr ? await stoichOf(deps, vehicle.id) : undefined
  const places = form.places ?? (asAfr ? afrPlaces : undefined)
  const quantity =
    revision.kind === 've'
      ? 'volumetric efficiency in %'
      : asAfr
        ? `target AFR at a stoichiometric ratio of ${stoichAfr}`
        : 'target lambda'
  const text = tableToCsv({
    grid: revision.grid,
    values: fromWire(revision.values),
    axes: form.axes,
    decimal: form.decimal,
    places,
    mapUnit: form.map,
    stoichAfr,
    tabs,
    remarks: [
      `${stateWords(revision)}: ${vehicle.name}, ${tableName(revision)}, revision ${revision.number}`,
      `${quantity}, ${places === undefined ? 'every place' : `${places} decimal places`}; MAP in ${form.map} absolute`,
      `SHA-256 of axes and values: ${revision.checksum}`,
      cautions.join(' '),
    ],
  })
  return { revision, vehicle, text }
}

export async function exportTable(deps: Deps, actor: Actor, revisionId: string, form: TableForm): Promise<FileAnswer> {
  const { revision, vehicle, text } = await tableText(deps, actor, revisionId, form, false)
  return {
    file: {
      name: fileName(vehicle.name, revision, 'csv'),
      type: 'text/csv; charset=utf-8',
      body: new TextEncoder().encode(text),
    },
  }
}

export async function exportCells(
  deps: Deps,
  actor: Actor,
  revisionId: string,
  form: TableForm,
): Promise<{ text: string }> {
  const { text } = await tableText(deps, actor, revisionId, form, true)
  return { text }
}

/** Indented, but with arrays of numbers on one line; raw line ends occur only between JSON's own tokens. */
const writeJson = (value: unknown): string =>
  JSON.stringify(value, null, 2).replace(/\[\n[\s\d.,eE+\-nul]*\n\s*\]/g, (numbers) => numbers.replace(/\s+/g, ' '))

async function parentOf(deps: Deps, revision: Revision) {
  const parent = revision.parentId ? await tableById(deps.db, revision.parentId) : null
  return parent ? { number: parent.number, state: parent.state, checksum: parent.checksum } : null
}

export async function exportProvenance(deps: Deps, actor: Actor, revisionId: string): Promise<FileAnswer> {
  const { revision, vehicle } = await inScope(deps, actor, revisionId)
  const review = await getReview(deps, actor, revisionId)
  const body = {
    stateInWords: stateWords(revision),
    vehicle: vehicle.name,
    cautions,
    ...revision,
    parent: await parentOf(deps, revision),
    review: { history: review.history, comments: review.comments },
    exportedAt: deps.clock.now().toISOString(),
  }
  return {
    file: {
      name: fileName(vehicle.name, revision, 'json'),
      type: 'application/json',
      body: new TextEncoder().encode(writeJson(body)),
    },
  }
}

export async function exportChangeSheet(deps: Deps, actor: Actor, revisionId: string): Promise<FileAnswer> {
  const { revision, vehicle } = await inScope(deps, actor, revisionId)
  const { lookFirst } = await getReview(deps, actor, revisionId)
  const body = await drawChangeSheet({
    revision,
    lookFirst,
    vehicle: vehicle.name,
    workshop: (await workshopSettings(deps.db, actor.workshopId)).name,
    parent: await parentOf(deps, revision),
    printed: instantWords(deps.clock.now().toISOString()),
    printedAt: deps.clock.now(),
  })
  return { file: { name: fileName(vehicle.name, revision, 'pdf'), type: 'application/pdf', body } }
}

export async function checkReadBack(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  input: { text: string; kind: 've' | 'target' },
): Promise<ReadBack> {
  const scope = scopeOf(actor)
  const vehicle = await vehicleInScope(deps.db, scope, vehicleId)
  const read = readTable(input.text, { kind: input.kind, stoichAfr: await stoichOf(deps, vehicleId) })
  if (!read.ok) throw new Problem('table-unreadable', { detail: read.problems[0]?.detail ?? 'It is no table.' })
  return compareReadBack(await tablesOf(deps.db, scope, vehicleId, input.kind), read, vehicle.flashedRevisionId)
}
