/** The change sheet: what goes into the controller, what changed, what to check, who answers for it. Bytes of a PDF. */
import type { LookFirst } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { ink, left, quiet, SheetPages, width } from './sheet-pages.ts'
import { changePct, drawChange, drawValues, placesOf, signed } from './sheet-table.ts'
import { cautions, instantWords, isDraft, stateWords, tableName } from './words.ts'

export interface ChangeSheetFacts {
  readonly revision: Revision
  readonly lookFirst: readonly LookFirst[]
  readonly vehicle: string
  readonly workshop: string
  readonly parent: { readonly number: number; readonly state: string } | null
  /** The instant of printing, in words and as a date for the file's own record. */
  readonly printed: string
  readonly printedAt: Date
}

const cellName = ({ grid }: Revision, cell: number): string =>
  `${grid.rpm[cell % grid.rpm.length]} rpm, ${grid.mapKpa[Math.floor(cell / grid.rpm.length)]} kPa`

export async function drawChangeSheet(facts: ChangeSheetFacts): Promise<Uint8Array> {
  const { revision, vehicle, workshop, printed } = facts
  const title = `Change sheet: revision ${revision.number} of the ${tableName(revision)}, ${vehicle}`
  const pages = new SheetPages({
    workshop,
    title,
    foot: `Printed ${printed}`,
    draft: isDraft(revision) ? stateWords(revision) : null,
    printedAt: facts.printedAt,
  })
  pages.paragraph(title, { size: 14, bold: true })
  pages.y += 4
  drawMeta(pages, facts)
  drawValues(pages, revision)
  drawReading(pages, facts)
  drawChecks(pages, facts)
  drawCautions(pages)
  drawSignatures(pages, revision)
  if (revision.parentValues !== null && revision.cellsChanged > 0) drawChanges(pages, facts)
  drawProvenance(pages, facts)
  return pages.finish()
}

function drawMeta(pages: SheetPages, { revision, parent }: ChangeSheetFacts): void {
  const items = [
    ['State', stateWords(revision)],
    ['From', parent ? `Revision ${parent.number}${parent.state === 'signed' ? '' : ', not signed'}` : 'no revision'],
    ['Changed', `${revision.cellsChanged} of ${revision.values.length} cells`],
    ['Checksum', revision.checksum.slice(0, 16).replace(/(.{4})(?=.)/g, '$1 ')],
  ] as const
  const at = [0, 0.5, 0.66, 0.82].map((share) => left + share * width)
  items.forEach(([label, value], i) => {
    const room = (at[i + 1] ?? left + width) - at[i]! - 8
    pages.line(label, at[i]!, pages.y, { size: 8, colour: quiet })
    pages
      .wrap(value, room, { size: 9, bold: true })
      .forEach((line, row) => pages.line(line, at[i]!, pages.y + 11 + row * 11, { size: 9, bold: true }))
  })
  pages.y += 40
}

function drawReading(pages: SheetPages, { revision, parent }: ChangeSheetFacts): void {
  const quantity =
    revision.kind === 've'
      ? 'Volumetric efficiency, %. Bold: changed, with the change in % beneath; minus is leaner.'
      : 'Target lambda. Bold: changed, with the change in % beneath; minus is richer.'
  const hatching = revision.provenance && parent ? ` Hatched: no evidence, value of revision ${parent.number}.` : ''
  pages.paragraph(`${quantity} Manifold pressure (kPa absolute) rises upward.${hatching}`, { size: 8, colour: quiet })
  pages.y += 10
}

/** Two columns: the cells to look at when entering, and figures to compare after it. */
function drawChecks(pages: SheetPages, { revision, lookFirst }: ChangeSheetFacts): void {
  const places = placesOf(revision)
  const shown = revision.values.flatMap((value) => (value === null ? [] : [Number(value.toFixed(places))]))
  const middle = Math.floor(revision.values.length / 2)
  const checks = [
    ['Lowest value', Math.min(...shown).toFixed(places)],
    ['Highest value', Math.max(...shown).toFixed(places)],
    [`Sum of all ${shown.length} values`, shown.reduce((sum, value) => sum + value, 0).toFixed(places)],
    [cellName(revision, middle), revision.values[middle]?.toFixed(places) ?? 'none'],
  ] as const
  const looks = lookFirst.slice(0, 6)
  pages.need(30 + 14 * Math.max(looks.length, checks.length))
  const from = pages.y
  const half = width / 2 - 12
  if (looks.length > 0) {
    pages.heading('Look at these when entering the table', left, half)
    for (const look of looks) {
      const sigma = look.sigmaPct === null ? '' : `, ±${((2 * look.sigmaPct * look.after) / 100).toFixed(1)}`
      pages.line(cellName(revision, look.cell), left, pages.y, { size: 8.5 })
      pages.line(
        `${look.before.toFixed(places)} to ${look.after.toFixed(places)}, ${signed(look.changePct, 1)} %${sigma}`,
        left + half,
        pages.y,
        { size: 8.5, align: 'right' },
      )
      pages.y += 14
    }
  }
  const after = pages.y
  pages.y = from
  pages.heading('Check after entering', left + half + 24, half)
  for (const [label, value] of checks) {
    pages.line(label, left + half + 24, pages.y, { size: 8.5 })
    pages.line(value, left + width, pages.y, { size: 8.5, bold: true, align: 'right' })
    pages.y += 14
  }
  pages.y = Math.max(after, pages.y) + 8
}

function drawCautions(pages: SheetPages): void {
  const words = cautions.join(' ')
  const lines = pages.wrap(words, width - 20, { size: 8.5 })
  const height = lines.length * 12 + 10
  pages.need(height + 8)
  pages.doc.rect(left, pages.y, width, height).lineWidth(0.75).strokeColor(ink).stroke()
  lines.forEach((line, i) => pages.line(line, left + 10, pages.y + 5 + i * 12, { size: 8.5 }))
  pages.y += height + 10
}

/** Prepared, reviewed, entered. The second stays empty until it is signed; the third is for the pen. */
function drawSignatures(pages: SheetPages, revision: Revision): void {
  const { signature, author } = revision
  const valid = isDraft(revision) ? null : signature
  pages.need(62)
  const w = (width - 32) / 3
  const lines = [
    [author.name, `Prepared, ${instantWords(revision.createdAt)}`],
    valid
      ? [valid.by.name, `${valid.byAuthor ? 'Signed by its author' : 'Reviewed'}, ${instantWords(valid.at)}`]
      : ['', 'Reviewed: not signed'],
    ['', 'Entered in the engine by, date'],
  ] as const
  lines.forEach(([name, what], i) => {
    const x = left + i * (w + 16)
    pages.line(name, x, pages.y + 14, { size: 12 }, w)
    pages.stroke(x, pages.y + 31, x + w, pages.y + 31, ink, 0.75)
    pages.line(what, x, pages.y + 35, { size: 7.5, colour: quiet }, w)
  })
  pages.y += 62
}

/** The map of the change, then every changed cell from and to, three columns a page. */
function drawChanges(pages: SheetPages, { revision, parent }: ChangeSheetFacts): void {
  pages.need(26 + Math.min(560, 15 * revision.grid.mapKpa.length + 22))
  pages.heading(`Change against revision ${parent?.number ?? ''} in %`)
  drawChange(pages, revision)
  const changed = revision.values.map((_, cell) => cell).filter((cell) => changePct(revision, cell) !== null)
  const places = placesOf(revision)
  pages.need(60)
  pages.heading(`Changed cells, ${changed.length}, from and to`)
  const columns = 3
  const gap = 26
  const w = (width - 2 * gap) / columns
  let next = 0
  while (next < changed.length) {
    const rows = Math.max(1, Math.min(Math.floor(pages.roomLeft / 11.5), Math.ceil((changed.length - next) / columns)))
    for (let column = 0; column < columns; column += 1) {
      changed.slice(next, next + rows).forEach((cell, i) => {
        const x = left + column * (w + gap)
        const y = pages.y + i * 11.5
        const [before, after] = [revision.parentValues![cell]!, revision.values[cell]!]
        pages.line(cellName(revision, cell), x, y, { size: 8, colour: quiet })
        pages.line(`${before.toFixed(places)} to ${after.toFixed(places)}`, x + w, y, { size: 8, align: 'right' })
      })
      next += rows
    }
    pages.y += rows * 11.5
    if (next < changed.length) pages.need(bottomless)
  }
  pages.y += 12
}

/** More than any page holds, so that the next one is begun. */
const bottomless = 10_000

const settingWords: Record<string, string> = {
  stepCapPct: 'Largest step of a cell in %',
  engineSheet: 'Engine sheet, writing',
  base: 'Checksum of the table learned from',
  target: 'Checksum of the target table',
}

function drawProvenance(pages: SheetPages, { revision }: ChangeSheetFacts): void {
  const settings = Object.entries(revision.settings ?? {}).filter(
    ([, value]) => typeof value === 'number' || typeof value === 'string',
  )
  const lines = [
    ...(revision.note ? [`Note: “${revision.note}”`] : []),
    ...(revision.signature?.note ? [`With the signature: “${revision.signature.note}”`] : []),
    ...(revision.logs.length === 0 ? ['No log stands behind this revision.'] : []),
    ...revision.logs.map((log) => `Log ${log.number}, ${log.title}. SHA-256 ${log.sha256}`),
    ...(revision.coreVersion ? [`Learned by core ${revision.coreVersion}.`] : []),
    ...settings.map(([name, value]) => `${settingWords[name] ?? name}: ${String(value)}`),
    `SHA-256 of axes and values: ${revision.checksum}`,
  ]
  pages.need(24 + Math.min(300, 11 * lines.length))
  pages.heading('Where it comes from')
  for (const line of lines) pages.paragraph(line, { size: 8 })
}
