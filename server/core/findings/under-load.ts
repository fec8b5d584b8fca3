/** Rows of settled high load: what the two detectors of the mixture under load look at. */
import { runsWhere, type DriveView } from './view.ts'

/** From this share of the air outside, an engine is near full load: common practice. */
const highLoad = 0.85
/** After load comes on, the mixture of before still passes the sensor. */
const settleS = 0.8

/** 1 where load has been high for a while. */
export function underLoad(view: DriveView): Uint8Array {
  const rows = new Uint8Array(view.n)
  for (const { from, to } of runsWhere(view, (i) => view.map[i]! > highLoad * view.baroKpa, settleS)) {
    for (let i = from; i <= to; i += 1) if (view.timeS[i]! - view.timeS[from]! > settleS) rows[i] = 1
  }
  return rows
}
