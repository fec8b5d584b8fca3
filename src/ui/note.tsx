/** Margin notes: evidence, reasons, cautions, and what people say. */
import { CornerDownRight, Info, Layers, MessageSquare, Ruler, Signature, TriangleAlert } from 'lucide-react'
import type { ReactNode } from 'react'

const icons = {
  layers: Layers,
  measurement: Ruler,
  reason: CornerDownRight,
  info: Info,
  comment: MessageSquare,
  caution: TriangleAlert,
  signature: Signature,
} as const

interface NoteProps {
  readonly icon: keyof typeof icons
  readonly head: string
  readonly kind?: 'plain' | 'caution' | 'says'
  readonly source?: string
  readonly children: ReactNode
}

const headColour = { plain: 'text-ink', caution: 'text-copper', says: 'text-slate' } as const

export function Note({ icon, head, kind = 'plain', source, children }: NoteProps) {
  const Icon = icons[icon]
  return (
    <aside
      aria-label={head}
      className="note-line relative text-ink-quiet phone:border-l phone:border-rule-margin phone:pl-3"
    >
      <p className={`flex gap-2 font-semibold ${headColour[kind]}`}>
        <Icon aria-hidden size={16} strokeWidth={1.75} className="mt-[3px] shrink-0" />
        {head}
      </p>
      <div className={`space-y-1.5 ${kind === 'says' ? 'text-ink italic' : ''}`}>{children}</div>
      {source ? <p className="mt-1 text-small text-ink-faint">{source}</p> : null}
    </aside>
  )
}
