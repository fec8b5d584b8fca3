/** How fast a log's bytes become columns, beside a loop that only counts newlines, papaparse and pandas. */
import Papa from 'papaparse'
import { driveAgain, flatbed } from '../../sample-logs/simulator/demo.ts'
import { toCsv } from '../../sample-logs/simulator/simulate.ts'
import { createLogReader } from '../../server/core/csv/read-log.ts'
import { judge, note, notMeasured, timed } from './report.ts'

export function ingest(): void {
  const group = 'ingest'
  const drive = { title: '', note: '', recordedOn: '', habit: 'road' as const, seconds: 3000, seed: 41, startC: 75 }
  const text = toCsv(driveAgain(flatbed, drive))
  const bytes = new TextEncoder().encode(text)
  const ours = timed(() => {
    const reader = createLogReader()
    for (let at = 0; at < bytes.length; at += 1 << 20) reader.push(bytes.subarray(at, at + (1 << 20)))
    const read = reader.end()
    if (!read.ok) throw new Error(read.detail)
  })
  const lines = timed(() => {
    let count = 0
    for (let i = 0; i < bytes.length; i += 1) if (bytes[i] === 10) count += 1
    if (count === 0) throw new Error('no lines')
  })
  const papa = timed(() => {
    Papa.parse(text, { header: true, dynamicTyping: true })
  }, 2)
  console.log(`\ningest: ${(bytes.length / 1e6).toFixed(1)} MB, 15 columns`)
  note({ group, name: 'reading', value: bytes.length / 1e6 / ours, unit: 'MB a second' })
  judge(group, 'speed', lines / ours, 'times', {
    atLeast: 0.3,
    stretch: 0.75,
    peer: 'a loop that only counts newlines',
  })
  judge(group, 'speed', papa / ours, 'times', {
    atLeast: 20,
    stretch: 45,
    peer: 'papaparse with header and dynamicTyping',
  })
  notMeasured(group, 'speed', 'pandas read_csv')
}
