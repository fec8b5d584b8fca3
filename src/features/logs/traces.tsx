/** The traces of a log: chosen channels on one time axis with one cursor; dragging, keys and buttons choose the stretch. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import type { ChannelName, Log, Trace } from '../../../shared/contract/logs.ts'
import { Banner } from '../../ui/banner.tsx'
import { Checkbox } from '../../ui/field.tsx'
import { Loading } from '../../ui/loading.tsx'
import type { Shade } from '../../ui/trace/trace-overlay.tsx'
import { TracePanel } from '../../ui/trace/trace-panel.tsx'
import { useWidth } from '../../ui/use-width.ts'
import { channelWords } from './channel-words.ts'
import { ExactValues } from './exact-values.tsx'
import { logQueries } from './queries.ts'
import { StretchBar, type StretchShown } from './stretch-bar.tsx'

const usual: readonly ChannelName[] = ['rpm', 'map', 'lambda', 'tp']

/** Lowest and highest reading of the bucket under the cursor, in words. */
export function valueAtCursor(trace: Trace, cursorS: number): string {
  const after = trace.timeS.findIndex((t) => t > cursorS)
  const i = after < 0 ? trace.timeS.length - 1 : Math.max(0, after - 1)
  const [low, high] = [trace.low[i] ?? null, trace.high[i] ?? null]
  if (low === null || high === null) return 'no reading'
  const unit = trace.unit === 'lambda' ? '' : ` ${trace.unit}`
  return low === high ? `${low}${unit}` : `${low} to ${high}${unit}`
}

interface TracesProps {
  readonly log: Log
  readonly stretch: StretchShown
  readonly onStretch: (from: number, to: number) => void
  readonly shades: readonly Shade[]
  readonly marks: readonly Shade[]
}

export function Traces({ log, stretch, onStretch, shades, marks }: TracesProps) {
  const [chosen, setChosen] = useState<readonly ChannelName[]>(() =>
    usual.filter((name) => log.channels.includes(name)),
  )
  const [cursorS, setCursorS] = useState<number | null>(null)
  const { ref, width } = useWidth()
  const withTarget: ChannelName[] =
    chosen.includes('lambda') && log.channels.includes('targetLambda') && !chosen.includes('targetLambda')
      ? [...chosen, 'targetLambda']
      : [...chosen]
  const traces = useQuery(
    logQueries.traces(log.id, withTarget, stretch.from, stretch.to, Math.max(200, Math.min(2000, Math.round(width)))),
  )
  const shown = traces.data?.traces ?? []
  const target = shown.find((trace) => trace.channel === 'targetLambda')
  const cursor = cursorS !== null && cursorS >= stretch.from && cursorS <= stretch.to ? cursorS : null
  const under = cursor === null ? [] : shades.filter(({ fromS, toS }) => cursor >= fromS && cursor <= toS)
  const overlay = { ...stretch, shades, marks, cursorS: cursor, onCursor: setCursorS, onStretch }
  return (
    <div>
      <StretchBar
        stretch={stretch}
        durationS={log.durationS}
        onStretch={onStretch}
        cursorS={cursor}
        onCursor={setCursorS}
      />
      <div ref={ref}>
        {traces.isPending || width === 0 ? <Loading what="Fetching the traces" /> : null}
        {traces.isError ? <Banner title={traces.error.message}>Load the page again.</Banner> : null}
        {width > 0
          ? shown
              .filter((trace) => trace.channel !== 'targetLambda' || chosen.includes('targetLambda'))
              .map((trace) => (
                <TracePanel
                  key={trace.channel}
                  name={
                    cursor === null
                      ? channelWords[trace.channel]
                      : `${channelWords[trace.channel]}: ${valueAtCursor(trace, cursor)}`
                  }
                  trace={trace}
                  second={trace.channel === 'lambda' ? target : undefined}
                  width={width}
                  overlay={overlay}
                />
              ))
          : null}
      </div>
      <p className="mt-1 flex flex-wrap gap-x-6 text-small text-ink-quiet">
        {target && chosen.includes('lambda') ? <span className="text-copper">Target lambda dashed</span> : null}
        {shades.length > 0 ? (
          <span>
            Hatched: cannot teach{under.length > 0 ? `; here: ${under.map(({ words }) => words).join(', ')}` : ''}
          </span>
        ) : null}
        {marks.length > 0 ? <span>Copper bar: a finding</span> : null}
      </p>
      <fieldset className="mt-4">
        <legend className="font-semibold">Channels shown</legend>
        <div className="flex flex-wrap gap-x-6">
          {log.channels
            .filter((name) => name !== 'time')
            .map((name) => (
              <Checkbox
                key={name}
                label={channelWords[name]}
                checked={chosen.includes(name)}
                onChange={(event) =>
                  setChosen(event.target.checked ? [...chosen, name] : chosen.filter((each) => each !== name))
                }
              />
            ))}
        </div>
      </fieldset>
      <ExactValues traces={shown.filter(({ channel }) => withTarget.includes(channel))} />
    </div>
  )
}
