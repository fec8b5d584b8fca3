/** The two tables of a change sheet: the values to enter, and the map of the change; cut into blocks where they are wide. */
import type { Revision } from '../../../shared/contract/tables.ts'
import { ink, left, quiet, rule, width, type SheetPages } from './sheet-pages.ts'

const axisWidth = 36
/** More columns than this would print below 7 points. */
const mostColumns = 16
const minus = '\u2212'

/** Places shown: one for VE, two for lambda, and up to four where a stored value has more. */
export function placesOf(revision: Revision): number {
  const least = revision.kind === 've' ? 1 : 2
  const needed = revision.values.map((value) => String(value ?? '').split('.')[1]?.length ?? 0)
  return Math.min(4, Math.max(least, ...needed))
}

export const signed = (value: number, places: number): string => {
  const text = Math.abs(value).toFixed(places)
  return Number(text) === 0 ? '0' : `${value < 0 ? minus : '+'}${text}`
}

export function changePct(revision: Revision, cell: number): number | null {
  const after = revision.values[cell] ?? null
  const before = revision.parentValues?.[cell] ?? null
  return after === null || before === null || after === before ? null : (after / before - 1) * 100
}

interface Block {
  readonly cols: readonly number[]
  /** Highest manifold pressure first, as the table is drawn. */
  readonly rows: readonly number[]
}

const piecesOf = (from: readonly number[], most: number): number[][] => {
  const count = Math.ceil(from.length / most)
  const each = Math.ceil(from.length / count)
  return Array.from({ length: count }, (_, i) => from.slice(i * each, (i + 1) * each))
}

function blocksOf(revision: Revision, rowHeight: number): Block[] {
  const rows = revision.grid.mapKpa.map((_, row) => row).toReversed()
  const cols = revision.grid.rpm.map((_, col) => col)
  return piecesOf(cols, mostColumns).flatMap((some) =>
    piecesOf(rows, Math.floor(560 / rowHeight)).map((few) => ({ cols: some, rows: few })),
  )
}

type DrawCell = (cell: number, x: number, y: number, w: number, h: number) => void

/** Axes and frame of every block; what is inside a cell is the caller's. */
function drawGrid(pages: SheetPages, revision: Revision, rowHeight: number, draw: DrawCell): void {
  const { rpm, mapKpa } = revision.grid
  for (const { cols, rows } of blocksOf(revision, rowHeight)) {
    pages.need(rows.length * rowHeight + 22)
    const w = (width - axisWidth) / Math.max(cols.length, 8)
    for (const row of rows) {
      pages.line(String(mapKpa[row]), left + axisWidth - 6, pages.y + rowHeight / 2 - 5, {
        size: 8,
        colour: quiet,
        align: 'right',
      })
      cols.forEach((col, i) => draw(row * rpm.length + col, left + axisWidth + i * w, pages.y, w, rowHeight))
      pages.y += rowHeight
    }
    pages.line('kPa, rpm', left + axisWidth - 6, pages.y + 3, { size: 7, colour: quiet, align: 'right' })
    cols.forEach((col, i) =>
      pages.line(String(rpm[col]), left + axisWidth + (i + 1) * w - 4, pages.y + 3, {
        size: 8,
        colour: quiet,
        align: 'right',
      }),
    )
    pages.y += 22
  }
}

function hatch(pages: SheetPages, x: number, y: number, w: number, h: number): void {
  const { doc } = pages
  doc.save().rect(x, y, w, h).clip().lineWidth(0.4).strokeColor('#cfc5b4')
  for (let at = -h; at < w; at += 4) doc.moveTo(x + at, y + h).lineTo(x + at + h, y)
  doc.stroke().restore()
}

const decisionWord: Record<string, string> = { held: 'held', pinned: 'pinned', 'by-hand': 'hand', kept: 'kept' }

/** Every value; changed ones bold with the change in % beneath, held and pinned in words, hatched without evidence. */
export function drawValues(pages: SheetPages, revision: Revision): void {
  const places = placesOf(revision)
  const { provenance, values } = revision
  drawGrid(pages, revision, 27, (cell, x, y, w, h) => {
    const change = changePct(revision, cell)
    const known = provenance === null || (provenance.evidenceS[cell] ?? 0) > 0
    if (!known) hatch(pages, x, y, w, h)
    pages.doc.rect(x, y, w, h).lineWidth(0.5).strokeColor(rule).stroke()
    const right = x + w - 3
    const value = values[cell] ?? null
    pages.line(value === null ? 'none' : value.toFixed(places), right, y + 3, {
      size: 9,
      bold: change !== null,
      colour: known || change !== null ? ink : quiet,
      align: 'right',
    })
    // Without evidence a cell is kept by itself: the hatching says so.
    const decided = provenance?.decision[cell] ?? ''
    const decision = known || decided !== 'kept' ? (decisionWord[decided] ?? '') : ''
    const under = change === null ? decision : signed(change, 1)
    pages.line(under, right, y + 15, { size: 7, colour: quiet, align: 'right' })
  })
}

/** Edges and tones of the change scale on paper: the light theme's, copper for richer, slate for leaner. */
const edges = [-16, -12, -8, -4, -1, 1, 4, 8, 12, 16]
const tones = [
  ['#274971', '#ffffff'],
  ['#47698b', '#ffffff'],
  ['#6a89a7', '#000000'],
  ['#90aac1', '#000000'],
  ['#baccda', '#000000'],
  ['#f2efe8', '#000000'],
  ['#dec4ad', '#000000'],
  ['#cb9c78', '#000000'],
  ['#b1764e', '#000000'],
  ['#93532e', '#ffffff'],
  ['#74310e', '#ffffff'],
] as const

/** The change of every cell in %, with its sign; more VE is richer, more lambda leaner. */
export function drawChange(pages: SheetPages, revision: Revision): void {
  drawGrid(pages, revision, 15, (cell, x, y, w, h) => {
    const change = changePct(revision, cell)
    const richer = (change ?? 0) * (revision.kind === 've' ? 1 : -1)
    const [ground, text] = tones[edges.filter((edge) => richer >= edge).length] ?? tones[5]
    if (change === null) pages.doc.rect(x, y, w, h).lineWidth(0.5).strokeColor(rule).stroke()
    else pages.doc.rect(x + 0.4, y + 0.4, w - 0.8, h - 0.8).fill(ground)
    if (change !== null) pages.line(signed(change, 1), x + w - 3, y + 3, { size: 7.5, colour: text, align: 'right' })
  })
}
