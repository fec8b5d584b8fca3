/** Choices of view and unit that a person finds again: kept on this device, apart for each person. */
import { useState } from 'react'
import { useMe } from './session.ts'

const keyOf = (personId: string, name: string) => `evenburn.choice.${personId}.${name}`

/** Storage may be full or forbidden; then the choice lasts as long as the page. */
function read(key: string): string | null {
  try {
    return localStorage.getItem(key)
  } catch {
    return null
  }
}

/** One of `choices`, the first until the person chose another. */
export function useRemembered<T extends string>(name: string, choices: readonly T[]): [T, (next: T) => void] {
  const key = keyOf(useMe().person.id, name)
  const [chosen, setChosen] = useState<T>(() => choices.find((each) => each === read(key)) ?? choices[0]!)
  return [
    chosen,
    (next) => {
      setChosen(next)
      try {
        localStorage.setItem(key, next)
      } catch {
        // Not remembered; nothing else depends on it.
      }
    },
  ]
}
