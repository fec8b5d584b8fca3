/**
 * Decisions as the page makes them: shown at once, sent with the version they were made on, undone without limit.
 * What the server has not confirmed lies on this device as well, and is sent when the page is opened again.
 */
import { useEffect, useMemo, useRef, useState } from 'react'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { ApiProblem } from '../../lib/api.ts'
import { useMe } from '../../lib/session.ts'
import { applyChanges, holds, inverseOf, type CellChange, type Decided, type Surface } from './decisions.ts'
import { agesOf } from './evidence.ts'
import { readPending, writePending } from './pending.ts'
import { useDecideCells } from './queries.ts'

interface Step {
  readonly redo: readonly CellChange[]
  readonly undo: readonly CellChange[]
}

export interface Decisions {
  readonly decided: Decided
  readonly pending: boolean
  /** True while the server cannot be reached; what was decided waits on this device. */
  readonly offline: boolean
  readonly problem: ApiProblem | null
  /** What was refused because somebody else decided meanwhile; sent again on top of theirs, or dropped. */
  readonly refused: readonly CellChange[]
  readonly sendRefused: () => void
  readonly dropRefused: () => void
  readonly canUndo: boolean
  readonly canRedo: boolean
  readonly decide: (changes: readonly CellChange[]) => void
  readonly undo: () => void
  readonly redo: () => void
}

/** Seconds between tries while there is no connection. */
const againAfterS = 4

const outOfReach = (error: unknown): boolean =>
  error instanceof ApiProblem && (error.status === 0 || error.status > 500)

export function useDecisions(proposal: Proposal & { surface: Surface }): Decisions {
  const personId = useMe().person.id
  const [left] = useState(() => readPending(personId, proposal.id))
  const [done, setDone] = useState<readonly Step[]>([])
  const [undone, setUndone] = useState<readonly Step[]>([])
  const [refused, setRefused] = useState<readonly CellChange[]>([])
  const [offline, setOffline] = useState(false)
  // Changes on their way to the server; later ones wait, so that each is sent with the version before it.
  const waiting = useRef<readonly (readonly CellChange[])[]>([])
  const [queue, setQueue] = useState<readonly (readonly CellChange[])[]>([])
  // The page may not have been drawn again since the last answer: the newest version known counts.
  const version = useRef(proposal.version)
  const isSending = useRef(false)
  const { decide, fetchAgain, error } = useDecideCells(proposal.id)

  const { surface, logs } = proposal
  const ages = useMemo(() => agesOf(surface, logs, new Date()), [surface, logs])
  // The same object until something is decided, so that what depends on it is not drawn for a mere move of the cursor.
  const decided = useMemo(() => {
    const stored: Decided = { surface, decisions: proposal.decisions, byHand: proposal.byHand, ages }
    return queue.reduce(applyChanges, stored)
  }, [surface, proposal.decisions, proposal.byHand, ages, queue])

  const keep = (steps: readonly (readonly CellChange[])[]) => {
    waiting.current = steps
    setQueue(steps)
    writePending(personId, proposal.id, { version: version.current, steps })
  }
  const refuse = () => {
    const lost = waiting.current
    setRefused(lost.flat())
    setDone((steps) => steps.slice(0, Math.max(0, steps.length - lost.length)))
    keep([])
  }

  /** Sends one step. The answer to an earlier try may have been lost: then the server holds it already. */
  const sendFirst = async (first: readonly CellChange[]): Promise<void> => {
    try {
      const answer = await decide({ version: version.current, cells: first.map((change) => ({ ...change })) })
      version.current = answer.version
    } catch (problem) {
      if (!(problem instanceof ApiProblem) || problem.slug !== 'changed-meanwhile') throw problem
      const fresh = await fetchAgain()
      const isOurs = fresh.version === version.current + 1 && holds(fresh, first)
      version.current = fresh.version
      if (!isOurs) throw problem
    }
  }

  const drain = async (): Promise<void> => {
    if (isSending.current) return
    isSending.current = true
    try {
      for (let first = waiting.current[0]; first; first = waiting.current[0]) {
        await sendFirst(first)
        setOffline(false)
        keep(waiting.current.slice(1))
      }
    } catch (problem) {
      if (outOfReach(problem)) setOffline(true)
      else refuse()
    } finally {
      isSending.current = false
    }
  }

  const send = (changes: readonly CellChange[]) => {
    // Somebody's switching of logs moves the version too; with nothing under way the page's is the newest.
    if (waiting.current.length === 0) version.current = Math.max(version.current, proposal.version)
    keep([...waiting.current, changes])
    void drain()
  }

  useEffect(() => {
    if (!left) return
    if (left.version === proposal.version || holds(proposal, left.steps[0]!)) {
      version.current = left.version
      keep(left.steps)
      void drain()
    } else setRefused(left.steps.flat())
    // Only what an earlier visit left, and only once.
    // oxlint-disable-next-line react-hooks/exhaustive-deps
  }, [])

  useEffect(() => {
    if (!offline) return undefined
    const again = () => void drain()
    const timer = setInterval(again, againAfterS * 1000)
    window.addEventListener('online', again)
    return () => {
      clearInterval(timer)
      window.removeEventListener('online', again)
    }
  })

  return {
    decided,
    pending: queue.length > 0,
    offline,
    problem: error instanceof ApiProblem && !outOfReach(error) ? error : null,
    refused,
    sendRefused() {
      setRefused([])
      setDone([...done, { redo: refused, undo: inverseOf(decided, refused) }])
      send(refused)
    },
    dropRefused() {
      setRefused([])
      writePending(personId, proposal.id, { version: version.current, steps: [] })
    },
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
