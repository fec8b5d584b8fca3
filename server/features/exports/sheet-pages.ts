/** The paper a change sheet is drawn on: pages with head and foot, a cursor, text in the right font, the draft mark. */
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import PDFDocument from 'pdfkit'
import { fontInWoff } from './woff.ts'

export const ink = '#2a1f18'
export const quiet = '#55473d'
export const rule = '#d8cfc0'
const margin = 40
/** A4 in points. */
const paper = { width: 595.28, height: 841.89 }
export const left = margin
export const width = paper.width - 2 * margin
const top = 92
const bottom = paper.height - 56

const files = createRequire(import.meta.url)
const subsets = ['latin', 'latin-ext', 'greek', 'cyrillic', 'vietnamese'] as const
type Subset = (typeof subsets)[number]
type Weight = 400 | 600

const fonts = new Map<string, Buffer>()

/** Read and unpacked when a process first prints. */
function fontOf(subset: Subset, weight: Weight): Buffer {
  const name = `${subset}-${weight}`
  const known = fonts.get(name)
  if (known) return known
  const file = files.resolve(`@fontsource/source-sans-3/files/source-sans-3-${name}-normal.woff`)
  const font = fontInWoff(readFileSync(file))
  fonts.set(name, font)
  return font
}

/** The font comes in pieces by script; names and notes may need several. */
function subsetOf(code: number): Subset | null {
  if (code <= 0xff || code === 0x131 || code === 0x152 || code === 0x153) return 'latin'
  if ((code >= 0x2000 && code <= 0x206f) || code === 0x20ac || code === 0x2122 || code === 0x2212) return 'latin'
  if (code >= 0x1ea0 && code <= 0x1ef9) return 'vietnamese'
  if ((code >= 0x100 && code <= 0x2af) || (code >= 0x1e00 && code <= 0x1e9f)) return 'latin-ext'
  if (code >= 0x370 && code <= 0x3ff) return 'greek'
  if (code >= 0x400 && code <= 0x45f) return 'cyrillic'
  return null
}

interface Run {
  readonly font: string
  readonly text: string
}

/** Runs of one font; a sign that no piece of the font has is printed as a question mark rather than lost. */
function runsOf(text: string, weight: Weight): Run[] {
  const runs: Run[] = []
  for (const sign of text.normalize('NFC')) {
    const subset = subsetOf(sign.codePointAt(0)!)
    const font = `${subset ?? 'latin'}-${weight}`
    const shown = subset === null ? '?' : sign
    const last = runs.at(-1)
    if (last?.font === font) runs[runs.length - 1] = { font, text: last.text + shown }
    else runs.push({ font, text: shown })
  }
  return runs
}

export interface TextStyle {
  readonly size?: number
  readonly bold?: boolean
  readonly colour?: string
  readonly align?: 'left' | 'right' | 'centre'
}

export interface SheetFrame {
  readonly workshop: string
  readonly title: string
  readonly foot: string
  /** The words that mark every page of a draft; null once signed. */
  readonly draft: string | null
  readonly printedAt: Date
}

export class SheetPages {
  readonly doc: PDFKit.PDFDocument
  private readonly frame: SheetFrame
  y = top

  constructor(frame: SheetFrame) {
    this.frame = frame
    this.doc = new PDFDocument({
      size: 'A4',
      margin: 0,
      bufferPages: true,
      lang: 'en-GB',
      displayTitle: true,
      info: { Title: frame.title, Author: frame.workshop, Creator: 'Evenburn', CreationDate: frame.printedAt },
    })
    for (const subset of subsets) {
      for (const weight of [400, 600] as const) {
        this.doc.registerFont(`${subset}-${weight}`, fontOf(subset, weight))
      }
    }
    this.doc.fillColor(ink)
  }

  /** Begins a page unless so many points are left on this one. True when it did. */
  need(points: number): boolean {
    if (this.y + points <= bottom) return false
    this.doc.addPage()
    this.y = top
    return true
  }

  get roomLeft(): number {
    return bottom - this.y
  }

  measure(text: string, { size = 9, bold = false }: TextStyle = {}): number {
    return runsOf(text, bold ? 600 : 400).reduce(
      (sum, run) => sum + this.doc.font(run.font, size).widthOfString(run.text),
      0,
    )
  }

  /** One line whose top left corner (or right edge, or middle) is at x, y; cut with an ellipsis where it is too long. */
  line(text: string, x: number, y: number, style: TextStyle = {}, most = Number.POSITIVE_INFINITY): void {
    const { size = 9, bold = false, colour = ink, align = 'left' } = style
    let shown = text
    while (shown.length > 1 && this.measure(shown, style) > most) shown = `${shown.slice(0, -2).trimEnd()}…`
    const taken = this.measure(shown, style)
    let at = align === 'left' ? x : align === 'right' ? x - taken : x - taken / 2
    for (const run of runsOf(shown, bold ? 600 : 400)) {
      this.doc.font(run.font, size).fillColor(colour).text(run.text, at, y, { lineBreak: false })
      at += this.doc.widthOfString(run.text)
    }
  }

  /** Words broken into lines of at most `most` points; a word longer than a line is cut into pieces. */
  wrap(text: string, most: number, style: TextStyle = {}): string[] {
    const lines: string[] = []
    let current = ''
    const words = text
      .split(/\s+/)
      .flatMap((word) => (this.measure(word, style) > most ? (word.match(/.{1,24}/gsu) ?? []) : [word]))
    for (const word of words) {
      const longer = current === '' ? word : `${current} ${word}`
      if (current !== '' && this.measure(longer, style) > most) {
        lines.push(current)
        current = word
      } else current = longer
    }
    return current === '' ? lines : [...lines, current]
  }

  /** Words at the cursor, which moves below them. */
  paragraph(text: string, style: TextStyle = {}, x = left, most = width): void {
    const step = (style.size ?? 9) * 1.35
    for (const line of this.wrap(text, most, style)) {
      this.need(step)
      this.line(line, x, this.y, style)
      this.y += step
    }
  }

  heading(text: string, x = left, across = width): void {
    this.line(text, x, this.y, { size: 10.5, bold: true })
    this.y += 15
    this.stroke(x, this.y, x + across, this.y, ink, 0.75)
    this.y += 5
  }

  stroke(x1: number, y1: number, x2: number, y2: number, colour = rule, weight = 0.5): void {
    this.doc.moveTo(x1, y1).lineTo(x2, y2).lineWidth(weight).strokeColor(colour).stroke()
  }

  /** Head, foot and the draft mark go on last, when the number of pages is known. */
  async finish(): Promise<Uint8Array> {
    const { count } = this.doc.bufferedPageRange()
    for (let page = 0; page < count; page += 1) {
      this.doc.switchToPage(page)
      this.dress(page + 1, count)
    }
    const pieces: Uint8Array[] = []
    const done = new Promise<void>((resolve, reject) => {
      this.doc.on('data', (piece: Uint8Array) => pieces.push(piece))
      this.doc.on('end', resolve)
      this.doc.on('error', reject)
    })
    this.doc.end()
    await done
    return Buffer.concat(pieces)
  }

  private dress(page: number, count: number): void {
    const { workshop, foot, draft } = this.frame
    this.mark(left, 37)
    this.line('Evenburn', left + 18, 34, { size: 12, bold: true })
    this.line(workshop, left + width, 36, { size: 9, colour: quiet, align: 'right' }, width / 2)
    this.stroke(left, 54, left + width, 54, ink, 1.5)
    this.stroke(left, 57, left + width, 57, ink, 0.75)
    if (draft) {
      this.doc.rect(left, 63, width, 18).lineWidth(1).strokeColor(ink).stroke()
      this.line(draft, left + width / 2, 66, { size: 9.5, bold: true, align: 'centre' }, width - 12)
      this.watermark()
    }
    const y = paper.height - 36
    this.line(`${foot}${draft ? '. Draft, not signed' : ''}`, left, y, { size: 8, colour: quiet }, width - 80)
    this.line(`Leaf ${page} of ${count}`, left + width, y, { size: 8, colour: quiet, align: 'right' })
  }

  private mark(x: number, y: number): void {
    for (let row = 0; row < 3; row += 1)
      for (let col = 0; col < 3; col += 1)
        if (row !== 0 || col !== 2) this.doc.rect(x + col * 4, y + row * 4, 3.2, 3.2).fill(ink)
    this.doc
      .rect(x + 8.4, y + 0.4, 2.4, 2.4)
      .lineWidth(0.6)
      .strokeColor(ink)
      .stroke()
  }

  /** Outlined across the page: it survives a copier and hides no number. */
  private watermark(): void {
    const { doc } = this
    doc.save()
    doc.rotate(-52, { origin: [paper.width / 2, paper.height / 2] })
    doc.opacity(0.16).font('latin-600', 84).lineWidth(1).strokeColor(ink)
    const words = 'NOT SIGNED'
    const x = (paper.width - doc.widthOfString(words)) / 2
    doc.text(words, x, paper.height / 2 - 45, { lineBreak: false, stroke: true, fill: false })
    doc.restore()
  }
}
