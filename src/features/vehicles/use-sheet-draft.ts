/** The engine sheet while it is being typed, and what is wrong with it once it was sent. */
import { useState } from 'react'
import { EngineSheetInput } from '../../../shared/contract/vehicles.ts'
import { sheetOf, type SheetDraft } from './sheet-form.ts'

export function useSheetDraft(start: SheetDraft) {
  const [draft, setDraft] = useState(start)
  const [errors, setErrors] = useState<Readonly<Record<string, string>>>({})
  return {
    draft,
    setDraft,
    errors,
    /** The sheet, or null with the errors placed on their fields. */
    read(): EngineSheetInput | null {
      const parsed = EngineSheetInput.safeParse(sheetOf(draft))
      if (parsed.success) {
        setErrors({})
        return parsed.data
      }
      setErrors(
        Object.fromEntries(
          parsed.error.issues.map((issue) => [
            String(issue.path[0]),
            issue.code === 'invalid_type' ? 'A number is needed here, with a point or a comma.' : issue.message,
          ]),
        ),
      )
      return null
    },
  }
}
