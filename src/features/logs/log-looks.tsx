/** What there is to see in a log that has been read: findings, traces, the path over the table, histograms. */
import { useQuery } from '@tanstack/react-query'
import { useRef, useState } from 'react'
import { useSearchParams } from 'react-router-dom'
import type { Log, Stretch } from '../../../shared/contract/logs.ts'
import { Banner } from '../../ui/banner.tsx'
import { Entry } from '../../ui/leaf.tsx'
import { Loading } from '../../ui/loading.tsx'
import { DrivePath } from './drive-path.tsx'
import { Findings } from './findings.tsx'
import { Histograms } from './histograms.tsx'
import { logQueries } from './queries.ts'
import { withinDrive, type StretchShown } from './stretch-bar.tsx'
import { Traces } from './traces.tsx'

/** Seconds shown before and after the stretch an address names. */
const beside = 10

/** The stretch that the address names, with a little before and after; else the whole drive. */
function stretchAsked(search: URLSearchParams, durationS: number): StretchShown {
  const [from, to] = [Number(search.get('from') ?? Number.NaN), Number(search.get('to') ?? Number.NaN)]
  if (!(from >= 0 && to >= from && from < durationS)) return { from: 0, to: durationS }
  return { from: Math.max(0, from - beside), to: Math.min(durationS, to + beside) }
}

/** Shown before and after a finding that is jumped to, s. */
const aroundS = 5

export function LogLooks({ log }: { log: Log }) {
  const inspection = useQuery(logQueries.inspection(log.id, log.version))
  const [search] = useSearchParams()
  const [stretch, setStretch] = useState<StretchShown>(() => stretchAsked(search, log.durationS))
  const [cells, setCells] = useState<ReadonlySet<number>>(new Set())
  const traces = useRef<HTMLDivElement>(null)
  const table = useRef<HTMLDivElement>(null)
  const show = (from: number, to: number) => setStretch(withinDrive({ from, to }, log.durationS))
  const jump = ({ fromS, toS }: Stretch) => {
    show(fromS - aroundS, toS + aroundS)
    traces.current?.scrollIntoView({ block: 'start' })
  }
  const point = (concerned: readonly number[]) => {
    setCells(new Set(concerned))
    table.current?.scrollIntoView({ block: 'start' })
  }
  const seen = inspection.data
  const marks = (seen?.findings ?? []).flatMap(({ title, stretches }) =>
    stretches.map((each) => ({ ...each, words: title })),
  )
  return (
    <>
      <Entry title="Findings" {...(seen ? { note: `${seen.findings.length}, the most urgent first` } : {})}>
        {inspection.isPending ? <Loading what="Looking over the log" /> : null}
        {inspection.isError ? <Banner title={inspection.error.message}>Load the page again.</Banner> : null}
        {seen ? (
          <Findings findings={seen.findings} grid={seen.path?.grid ?? null} onStretch={jump} onCells={point} />
        ) : null}
      </Entry>
      <div ref={traces}>
        <Entry title="Traces" note="lowest and highest readings in each stretch">
          <Traces
            log={log}
            stretch={stretch}
            onStretch={show}
            marks={marks}
            shades={(seen?.leftOut ?? []).map(({ reason, ...each }) => ({ ...each, words: reason }))}
          />
        </Entry>
      </div>
      {seen?.path ? (
        <div ref={table}>
          <Entry title="Path over the table" note="seconds nearest to each cell">
            <DrivePath path={seen.path} concerned={cells} />
          </Entry>
        </div>
      ) : null}
      {seen && seen.histograms.length > 0 ? (
        <Entry title="Spread of each channel" note="how long it stood where">
          <Histograms histograms={seen.histograms} />
        </Entry>
      ) : null}
    </>
  )
}
