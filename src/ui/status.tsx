/** Status words, each with its icon; the more urgent, the more ink. */
import {
  Check,
  CircleHelp,
  Equal,
  History,
  Lock,
  MessageSquare,
  Minus,
  Pencil,
  PenLine,
  Pin,
  RotateCcw,
  Shield,
  TriangleAlert,
  Unplug,
} from 'lucide-react'

const words = {
  Dead: ['stop', Unplug],
  Failed: ['stop', TriangleAlert],
  Caution: ['caution', TriangleAlert],
  'Sent back': ['caution', RotateCcw],
  'Needs an answer': ['caution', CircleHelp],
  Refused: ['caution', TriangleAlert],
  Submitted: ['wait', PenLine],
  Waiting: ['wait', History],
  Reading: ['wait', History],
  Learning: ['wait', History],
  Question: ['wait', MessageSquare],
  Sound: ['calm', Check],
  Absent: ['calm', Minus],
  Draft: ['calm', Pencil],
  Signed: ['calm', Lock],
  Learned: ['calm', Check],
  Ready: ['calm', Check],
  'Left out': ['calm', Minus],
  Accepted: ['calm', Check],
  Kept: ['calm', Equal],
  'By hand': ['calm', Pencil],
  Pinned: ['calm', Pin],
  Held: ['calm', Shield],
  Open: ['calm', null],
  'No evidence': ['calm', null],
} as const

export type StatusWord = keyof typeof words

const look = {
  stop: 'bg-ink text-on-ink rounded-cut py-px pr-2 pl-1.5 font-semibold',
  caution: 'text-copper font-semibold',
  wait: 'text-slate font-semibold',
  calm: 'text-ink-quiet',
} as const

export function Status({ state }: { state: StatusWord }) {
  const [tone, Icon] = words[state]
  return (
    <span className={`inline-flex items-baseline gap-1.5 whitespace-nowrap ${look[tone]}`}>
      {Icon ? <Icon aria-hidden size={14} strokeWidth={2.25} className="self-center" /> : null}
      {state === 'Open' ? <i aria-hidden className="inline-block size-2.5 border-[1.5px] border-current" /> : null}
      {state === 'No evidence' ? (
        <i aria-hidden className="inline-block h-2.5 w-3.5 border border-rule [background:var(--hatch)]" />
      ) : null}
      {state}
    </span>
  )
}
