/** The width a chart may take. */
import { useEffect, useRef, useState } from 'react'

/** Width of the element that takes `ref`, px, followed as the page changes. @param start  until it is measured. */
export function useWidth(start = 0) {
  const ref = useRef<HTMLDivElement>(null)
  const [width, setWidth] = useState(start)
  useEffect(() => {
    const element = ref.current
    if (!element) return undefined
    const observer = new ResizeObserver(([entry]) => setWidth(entry?.contentRect.width ?? 0))
    observer.observe(element)
    return () => observer.disconnect()
  }, [])
  return { ref, width }
}
