/** `npm run bench`, or `npm run bench -- GROUP …`: accuracy and speed, each against its bar and its peers in the same run. */
import { accuracy, guardTable } from './accuracy.ts'
import { effects } from './effects.ts'
import { faults } from './faults.ts'
import { flashAndDrive } from './flash.ts'
import { ingest } from './ingest.ts'
import { writeReport } from './report.ts'
import { speed } from './speed.ts'
import { web } from './web.ts'

const groups: Readonly<Record<string, () => void | Promise<void>>> = {
  accuracy,
  guard: guardTable,
  flash: flashAndDrive,
  faults,
  effects,
  speed,
  ingest,
  web,
}
const wanted = process.argv.slice(2)
const unknown = wanted.filter((name) => !(name in groups))
if (unknown.length > 0) {
  console.error(`There is no group ${unknown.join(', ')}. Groups: ${Object.keys(groups).join(', ')}.`)
  process.exit(2)
}
for (const [name, run] of Object.entries(groups)) if (wanted.length === 0 || wanted.includes(name)) await run()
writeReport()
