/** Twelve cells filling, with words for the step. */
export function Progress({ value, label }: { value: number; label: string }) {
  const full = Math.round(12 * Math.min(1, Math.max(0, value)))
  return (
    <div>
      <p className="mb-1.5">{label}</p>
      <div
        role="progressbar"
        aria-label={label}
        aria-valuenow={Math.round(100 * value)}
        aria-valuemin={0}
        aria-valuemax={100}
        className="grid grid-cols-12 gap-0.5"
      >
        {Array.from({ length: 12 }, (_, i) => (
          <i key={i} className={`h-2.5 ${i < full ? 'bg-copper' : 'border border-rule [background:var(--hatch)]'}`} />
        ))}
      </div>
    </div>
  )
}
