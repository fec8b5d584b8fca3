/** Who spoke for a cell, when, and what the guard made of it. Pure. */
import type { CellSample, Proposal } from '../../../shared/contract/proposals.ts'
import type { z } from 'zod'
import { highLoadKpa } from '../../../shared/grid.ts'
import { formatNumber } from '../../lib/format.ts'
import { hasEvidence, type Surface } from './decisions.ts'

export type Sample = z.infer<typeof CellSample>
type ProposalLog = Proposal['logs'][number]

export interface LogPart {
  readonly log: ProposalLog
  readonly seconds: number
  /** Share of the cell's evidence, 0 to 1. */
  readonly share: number
}

/** The logs that spoke for the cell, the one with most to say first. */
export function logParts(surface: Surface, logs: readonly ProposalLog[], cell: number): LogPart[] {
  const parts = surface.logs.flatMap(({ logId, evidenceS }) => {
    const log = logs.find(({ id }) => id === logId)
    const seconds = evidenceS[cell] ?? 0
    return log && seconds > 0 ? [{ log, seconds }] : []
  })
  const total = parts.reduce((sum, { seconds }) => sum + seconds, 0)
  return parts.map((part) => ({ ...part, share: part.seconds / total })).toSorted((a, b) => b.seconds - a.seconds)
}

/** Less than this many useful seconds of a log is no visit to speak of; the learner draws the same line. */
const leastEvidenceS = 0.3

/** Days since the newest drive that spoke for each cell; null where none did. */
export function agesOf(surface: Surface, logs: readonly ProposalLog[], today: Date): (number | null)[] {
  const days = surface.logs.map(({ logId, evidenceS }) => {
    const log = logs.find(({ id }) => id === logId)
    const age = log ? (today.getTime() - Date.parse(`${log.drivenOn}T00:00:00Z`)) / 86_400_000 : Number.NaN
    return { evidenceS, days: Math.max(0, Math.floor(age)) }
  })
  return surface.current.map((_, cell) => {
    const found = days.filter(({ evidenceS }) => (evidenceS[cell] ?? 0) >= leastEvidenceS).map((each) => each.days)
    return found.length === 0 ? null : Math.min(...found)
  })
}

const n = (value: number) => formatNumber(value, 1)

/** What stood between the fit and the proposal for the cell, in a sentence. */
export function guardSentence(surface: Surface, cell: number, stepCapPct: number): string | null {
  if (!hasEvidence(surface, cell)) return null
  const held = surface.held.find((each) => each.cell === cell)
  if (held) {
    const more = held.releaseS === null ? '' : ` About ${formatNumber(held.releaseS)} s more would release it.`
    return `${held.reason}${more}`
  }
  const [current, fitted, proposed] = [surface.current[cell]!, surface.fitted[cell]!, surface.proposed[cell]!]
  if (Math.abs(proposed - fitted) < 0.05) return 'The lean guard and the step limit changed nothing here.'
  const capped = Math.abs(Math.abs(proposed / current - 1) * 100 - stepCapPct) < 0.01
  if (capped) {
    return `The fit says ${n(fitted)}; one revision moves a cell by ${formatNumber(stepCapPct)} % at most, so ${n(proposed)} is proposed. Drive again and learn the rest.`
  }
  const mapKpa = surface.grid.mapKpa[Math.floor(cell / surface.grid.rpm.length)]!
  return mapKpa >= highLoadKpa(surface.grid)
    ? `The fit says ${n(fitted)}. At high load only the rich side of its doubt is taken: ${n(proposed)}.`
    : `The fit says ${n(fitted)}, ${n(proposed)} is proposed.`
}

/** A value by hand that is leaner at high load than the guard would propose; the person must know. */
export function leanerThanGuard(surface: Surface, cell: number, value: number): boolean {
  const mapKpa = surface.grid.mapKpa[Math.floor(cell / surface.grid.rpm.length)]!
  return mapKpa >= highLoadKpa(surface.grid) && value < (surface.proposed[cell] ?? surface.current[cell] ?? 0) - 0.05
}

export interface Stretch {
  readonly logId: string
  readonly fromS: number
  readonly toS: number
  readonly samples: number
  /** Mean of the samples' own VE, each by its share, %. */
  readonly ve: number
}

/** Readings further apart than this belong to different stretches, s. */
const stretchGapS = 5

/** The stretches of the drives that the samples lie in, in the order of logs and time. */
export function stretchesOf(samples: readonly Sample[]): Stretch[] {
  const groups: Sample[][] = []
  for (const sample of samples) {
    const last = groups.at(-1)?.at(-1)
    if (last && last.logId === sample.logId && sample.timeS - last.timeS <= stretchGapS) groups.at(-1)!.push(sample)
    else groups.push([sample])
  }
  return groups.map((group) => ({
    logId: group[0]!.logId,
    fromS: group[0]!.timeS,
    toS: group.at(-1)!.timeS,
    samples: group.length,
    ve: group.reduce((sum, { ve, share }) => sum + ve * share, 0) / group.reduce((sum, { share }) => sum + share, 0),
  }))
}
