/** The traces of a log: chosen channels on one time axis, zoomed by choosing a stretch. */
import { useQuery } from '@tanstack/react-query'
import { useEffect, useRef, useState } from 'react'
import { useSearchParams } from 'react-router-dom'
import type { ChannelName, Log } from '../../../shared/contract/logs.ts'
import { formatClock } from '../../lib/format.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Checkbox } from '../../ui/field.tsx'
import { Loading } from '../../ui/loading.tsx'
import { TracePanel } from '../../ui/trace/trace-panel.tsx'
import { channelWords } from './channel-words.ts'
import { logQueries } from './queries.ts'

const usual: readonly ChannelName[] = ['rpm', 'map', 'lambda', 'tp']

/** Width of the element, followed as it changes. */
function useWidth() {
  const ref = useRef<HTMLDivElement>(null)
  const [width, setWidth] = useState(0)
  useEffect(() => {
    const element = ref.current
    if (!element) return
    const observer = new ResizeObserver(([entry]) => setWidth(entry?.contentRect.width ?? 0))
    observer.observe(element)
    return () => observer.disconnect()
  }, [])
  return { ref, width }
}

/** Seconds shown before and after the stretch an address names. */
const beside = 10

/** The stretch that the address names, with a little before and after; else the whole drive. */
function stretchAsked(search: URLSearchParams, durationS: number): { from: number; to: number } {
  const [from, to] = [Number(search.get('from') ?? Number.NaN), Number(search.get('to') ?? Number.NaN)]
  if (!(from >= 0 && to >= from && from < durationS)) return { from: 0, to: durationS }
  return { from: Math.max(0, from - beside), to: Math.min(durationS, to + beside) }
}

export function Traces({ log }: { log: Log }) {
  const [chosen, setChosen] = useState<readonly ChannelName[]>(() =>
    usual.filter((name) => log.channels.includes(name)),
  )
  const [search] = useSearchParams()
  const [stretch, setStretch] = useState(() => stretchAsked(search, log.durationS))
  const { ref, width } = useWidth()
  const withTarget: ChannelName[] =
    chosen.includes('lambda') && log.channels.includes('targetLambda') ? [...chosen, 'targetLambda'] : [...chosen]
  const traces = useQuery(
    logQueries.traces(log.id, withTarget, stretch.from, stretch.to, Math.max(200, Math.min(2000, Math.round(width)))),
  )
  const length = stretch.to - stretch.from
  const show = (from: number, to: number) => setStretch({ from: Math.max(0, from), to: Math.min(log.durationS, to) })
  const whole = stretch.from <= 0 && stretch.to >= log.durationS
  const target = traces.data?.traces.find((trace) => trace.channel === 'targetLambda')
  return (
    <div>
      <div className="mb-3 flex flex-wrap items-center gap-2" role="group" aria-label="Stretch of the drive">
        <Button disabled={stretch.from <= 0} onClick={() => show(stretch.from - length / 2, stretch.to - length / 2)}>
          Earlier
        </Button>
        <Button
          disabled={stretch.to >= log.durationS}
          onClick={() => show(stretch.from + length / 2, stretch.to + length / 2)}
        >
          Later
        </Button>
        <Button disabled={length < 4} onClick={() => show(stretch.from + length / 4, stretch.to - length / 4)}>
          Closer
        </Button>
        <Button disabled={whole} onClick={() => show(stretch.from - length / 2, stretch.to + length / 2)}>
          Wider
        </Button>
        <Button disabled={whole} onClick={() => show(0, log.durationS)}>
          Whole drive
        </Button>
        <span role="status" className="text-ink-faint">
          {formatClock(stretch.from)} to {formatClock(stretch.to)}
        </span>
      </div>
      <div ref={ref}>
        {traces.isPending || width === 0 ? <Loading what="Fetching the traces" /> : null}
        {traces.isError ? <Banner title={traces.error.message}>Load the page again.</Banner> : null}
        {width > 0
          ? traces.data?.traces
              .filter((trace) => trace.channel !== 'targetLambda' || chosen.includes('targetLambda'))
              .map((trace) => (
                <TracePanel
                  key={trace.channel}
                  name={channelWords[trace.channel]}
                  trace={trace}
                  second={trace.channel === 'lambda' ? target : undefined}
                  width={width}
                />
              ))
          : null}
      </div>
      {target && chosen.includes('lambda') ? <p className="mt-1 text-small text-copper">Target lambda dashed</p> : null}
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
    </div>
  )
}
