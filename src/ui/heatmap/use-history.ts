/** A value that can be undone and redone without limit, for tables that are edited before they are stored. */
import { useState } from 'react'

export interface History<T> {
  readonly now: T
  readonly canUndo: boolean
  readonly canRedo: boolean
  readonly set: (next: T) => void
  readonly undo: () => void
  readonly redo: () => void
}

interface Steps<T> {
  readonly past: readonly T[]
  readonly now: T
  readonly future: readonly T[]
}

export function useHistory<T>(start: T): History<T> {
  const [steps, setSteps] = useState<Steps<T>>({ past: [], now: start, future: [] })
  return {
    now: steps.now,
    canUndo: steps.past.length > 0,
    canRedo: steps.future.length > 0,
    set: (next) => setSteps(({ past, now }) => ({ past: [...past, now], now: next, future: [] })),
    undo: () =>
      setSteps((all) => {
        const last = all.past.at(-1)
        return last === undefined ? all : { past: all.past.slice(0, -1), now: last, future: [all.now, ...all.future] }
      }),
    redo: () =>
      setSteps((all) => {
        const [next, ...rest] = all.future
        return next === undefined ? all : { past: [...all.past, all.now], now: next, future: rest }
      }),
  }
}
