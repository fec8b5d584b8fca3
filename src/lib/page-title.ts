/** The page's name in the browser's tab and history. */
import { useEffect } from 'react'

export function usePageTitle(title: string): void {
  useEffect(() => {
    document.title = `${title} · Evenburn`
  }, [title])
}
