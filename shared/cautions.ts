/** What a reviewer ticks before signing: the cautions, each where the decision is made. */

export const checklistKeys = ['looked', 'lean-load', 'first-drive', 'who-operates', 'law', 'record'] as const
export type ChecklistKey = (typeof checklistKeys)[number]

export const checklistWords: Readonly<Record<ChecklistKey, string>> = {
  looked: 'I have looked at the whole table, and first at the cells named above.',
  'lean-load':
    'Where it goes leaner under load, the evidence carries it. Lean mixture under load melts pistons; I err on the rich side.',
  'first-drive': 'On the first pull someone listens and looks for knock, and it stops at any doubt.',
  'who-operates':
    'Nobody works the product while driving: a passenger does, or it is a dyno or a parked vehicle, never indoors without extraction.',
  law: 'Whether the change may be driven on the road is for local law and inspection; work that needs a licence is done by those who hold it.',
  record:
    'I know that a wrong table can destroy an engine or start a fire, and that my signature records a look and is no guarantee.',
}
