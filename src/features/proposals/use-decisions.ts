/** Decisions as the page makes them: shown at once, sent with the version they were made on, undone without limit. */
import { useRef, useState } from 'react'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { ApiProblem } from '../../lib/api.ts'
import { applyChanges, inverseOf, type CellChange, type Decided, type Surface } from './decisions.ts'
import { useDecideCells } from './queries.ts'

interface Step {
  readonly redo: readonly CellChange[]
  readonly undo: readonly CellChange[]
}

export interface Decisions {
  readonly decided: Decided
  readonly pending: boolean
  readonly problem: ApiProblem | null
  readonly canUndo: boolean
  readonly canRedo: boolean
  readonly decide: (changes: readonly CellChange[]) => void
  readonly undo: () => void
  readonly redo: () => void
}

export function useDecisions(proposal: Proposal & { surface: Surface }): Decisions {
  const [done, setDone] = useState<readonly Step[]>([])
  const [undone, setUndone] = useState<readonly Step[]>([])
  // Changes on their way to the server; later ones wait, so that each is sent with the version before it.
  const waiting = useRef<readonly (readonly CellChange[])[]>([])
  const [queue, setQueue] = useState<readonly (readonly CellChange[])[]>([])
  // The page may not have been drawn again since the last answer: the newest version known counts.
  const answered = useRef(0)
  const mutation = useDecideCells(proposal.id)

  const stored: Decided = { surface: proposal.surface, decisions: proposal.decisions, byHand: proposal.byHand }
  const decided = queue.reduce(applyChanges, stored)

  const enqueue = (next: readonly (readonly CellChange[])[]) => {
    waiting.current = next
    setQueue(next)
  }

  const drain = async (start: number): Promise<void> => {
    let version = Math.max(start, answered.current)
    for (let first = waiting.current[0]; first; first = waiting.current[0]) {
      try {
        version = (await mutation.mutateAsync({ version, cells: first.map((change) => ({ ...change })) })).version
        answered.current = version
        enqueue(waiting.current.slice(1))
      } catch {
        // The banner says what was refused; what was not stored is taken off the page, so that it shows the truth.
        const lost = waiting.current.length
        enqueue([])
        setDone((steps) => steps.slice(0, Math.max(0, steps.length - lost)))
      }
    }
  }

  const send = (changes: readonly CellChange[]) => {
    const idle = waiting.current.length === 0
    enqueue([...waiting.current, changes])
    if (idle) void drain(proposal.version)
  }

  return {
    decided,
    pending: queue.length > 0,
    problem: mutation.error instanceof ApiProblem ? mutation.error : null,
    canUndo: done.length > 0,
    canRedo: undone.length > 0,
    decide(changes) {
      if (changes.length === 0) return
      setDone([...done, { redo: changes, undo: inverseOf(decided, changes) }])
      setUndone([])
      send(changes)
    },
    undo() {
      const step = done.at(-1)
      if (!step) return
      setDone(done.slice(0, -1))
      setUndone([...undone, step])
      send(step.undo)
    },
    redo() {
      const step = undone.at(-1)
      if (!step) return
      setUndone(undone.slice(0, -1))
      setDone([...done, step])
      send(step.redo)
    },
  }
}
