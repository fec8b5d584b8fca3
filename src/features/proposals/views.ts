/** The ways of looking at the same cells: what each shows, how it is written, and what it is called. */
import type { HeatmapView } from '../../ui/heatmap/heatmap.tsx'
import { changePct, takenValue, type Decided } from './decisions.ts'

export const views = ['current', 'proposed', 'change', 'evidence', 'uncertainty', 'misfit', 'age'] as const
export type View = (typeof views)[number]

export const viewName: Record<View, string> = {
  current: 'Current',
  proposed: 'Proposed',
  change: 'Change',
  evidence: 'Evidence',
  uncertainty: 'Uncertainty',
  misfit: 'Misfit',
  age: 'Age',
}

/** Unit shown beside the legend. */
export const viewUnit: Record<View, string> = {
  current: 'VE, %',
  proposed: 'VE, %',
  change: '%, minus is leaner, plus is richer',
  evidence: 'seconds of useful data',
  uncertainty: '± % of the value, one standard deviation',
  misfit: '%, what the fit could not explain',
  age: 'days since the last drive that spoke for the cell',
}

export const viewScale: Record<View, HeatmapView> = {
  current: 'magnitude',
  proposed: 'magnitude',
  change: 'change',
  evidence: 'evidence',
  uncertainty: 'uncertainty',
  misfit: 'misfit',
  age: 'age',
}

export const viewDigits: Record<View, number> = {
  current: 1,
  proposed: 1,
  change: 1,
  evidence: 1,
  uncertainty: 1,
  misfit: 1,
  age: 0,
}

/** The value a cell shows in a view; a decided cell shows what the revision takes, an open one what is proposed. */
export function viewValue(decided: Decided, view: View, cell: number): number | null {
  const { surface, decisions } = decided
  const current = surface.current[cell] ?? null
  const open = decisions[cell] === 'open'
  const after = open ? (surface.proposed[cell] ?? null) : takenValue(decided, cell)
  switch (view) {
    case 'current':
      return current
    case 'proposed':
      return after
    case 'change':
      return current === null || after === null ? null : changePct(current, after)
    case 'evidence':
      return surface.evidenceS[cell] ?? null
    case 'uncertainty':
      return surface.sigmaPct[cell] ?? null
    case 'misfit':
      return surface.misfitPct[cell] ?? null
    case 'age':
      return decided.ages?.[cell] ?? null
  }
}
