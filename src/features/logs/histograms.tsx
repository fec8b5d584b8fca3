/** How long each channel stood at which value. */
import type { Histogram } from '../../../shared/contract/logs.ts'
import { formatNumber } from '../../lib/format.ts'
import { channelWords } from './channel-words.ts'

const [width, height] = [220, 56]

function Bars({ channel, unit, low, high, seconds }: Histogram) {
  const most = Math.max(...seconds)
  // A channel that never moved is one thin bar, not a block.
  const step = seconds.length === 1 ? 6 : width / seconds.length
  const peak = seconds.indexOf(most)
  const digits = high - low < 5 ? 2 : 0
  const at = low + ((peak + 0.5) * (high - low)) / seconds.length
  return (
    <figure>
      <figcaption className="text-small font-semibold">{channelWords[channel]}</figcaption>
      <svg
        viewBox={`0 0 ${width} ${height}`}
        className="block w-full border-b border-rule-strong"
        role="img"
        aria-label={`${channelWords[channel]}: longest near ${formatNumber(at, digits)} ${unit}, ${formatNumber(most, 1)} s`}
      >
        {seconds.map((each, i) => (
          <rect
            // The bins have no other name than their place.
            key={low + i * step}
            x={i * step}
            y={height - (height * each) / most}
            width={Math.max(0.5, step - 1)}
            height={(height * each) / most}
            fill="var(--color-slate)"
          />
        ))}
      </svg>
      <p className="flex justify-between text-small text-ink-faint">
        <span>{formatNumber(low, digits)}</span>
        <span>
          {formatNumber(high, digits)} {unit}
        </span>
      </p>
    </figure>
  )
}

export const Histograms = ({ histograms }: { histograms: readonly Histogram[] }) => (
  <div className="grid gap-x-8 gap-y-5 [grid-template-columns:repeat(auto-fill,minmax(150px,1fr))]">
    {histograms.map((each) => (
      <Bars key={each.channel} {...each} />
    ))}
  </div>
)
