/** Every detector, the most urgent findings first. */
import type { Finding } from '../../../shared/contract/logs.ts'
import { deadTimePattern, leakPattern } from './by-flow.ts'
import { closedLoop } from './closed-loop.ts'
import { dropouts } from './dropouts.ts'
import { cutMissing, cutStays } from './fuel-cut.ts'
import { heatSoak } from './heat-soak.ts'
import { hunting } from './hunting.ts'
import { leanLoad } from './lean-load.ts'
import { misfire } from './misfire.ts'
import { richLoad } from './rich-load.ts'
import { richSurge } from './rich-surge.ts'
import { stall } from './stall.ts'
import { tipIn } from './tip-in.ts'
import type { Detector, DriveView } from './view.ts'
import { warmUp } from './warm-up.ts'

const detectors: readonly Detector[] = [
  leanLoad,
  misfire,
  dropouts,
  stall,
  hunting,
  leakPattern,
  deadTimePattern,
  richLoad,
  richSurge,
  tipIn,
  cutStays,
  cutMissing,
  closedLoop,
  warmUp,
  heatSoak,
]

const order = { stop: 0, look: 1, note: 2 } as const

export const findingsOf = (view: DriveView): Finding[] =>
  detectors.flatMap((detect) => detect(view) ?? []).sort((a, b) => order[a.urgency] - order[b.urgency])
