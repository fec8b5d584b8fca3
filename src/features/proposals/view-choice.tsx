/** The choice of view: words with a strip of the scale each uses. */
import { viewName, viewScale, views, type View } from './views.ts'

const magnitude = ['seq-1', 'seq-3', 'seq-5', 'seq-7', 'seq-9']
const change = ['div-1', 'div-3', 'div-5', 'div-7', 'div-9']

export function ViewChoice({ view, onChange }: { view: View; onChange: (view: View) => void }) {
  return (
    <div role="radiogroup" aria-label="What the cells show" className="flex min-w-0 gap-x-5 gap-y-2 overflow-x-auto">
      {views.map((each, i) => (
        <button
          key={each}
          type="button"
          role="radio"
          aria-checked={each === view}
          title={`Alt and ${i + 1}`}
          aria-keyshortcuts={`Alt+${i + 1}`}
          onClick={() => onChange(each)}
          className="block cursor-pointer border-b-2 border-transparent pb-1 text-left text-ink-quiet aria-checked:border-ink aria-checked:font-semibold aria-checked:text-ink"
        >
          {viewName[each]}
          <span aria-hidden className="mt-1 flex gap-px">
            {(viewScale[each] === 'change' || viewScale[each] === 'misfit' ? change : magnitude).map((tone) => (
              <i key={tone} className="h-[5px] w-[9px]" style={{ background: `var(--color-${tone})` }} />
            ))}
          </span>
        </button>
      ))}
    </div>
  )
}
