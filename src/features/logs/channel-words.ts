/** The trade's names of the channels. */
import type { ChannelName } from '../../../shared/contract/logs.ts'

export const channelWords: Readonly<Record<ChannelName, string>> = {
  time: 'Time',
  rpm: 'Engine speed',
  map: 'Manifold pressure (MAP)',
  lambda: 'Lambda, wideband',
  targetLambda: 'Target lambda',
  ect: 'Coolant temperature (ECT)',
  iat: 'Intake air temperature (IAT)',
  tp: 'Throttle position (TP)',
  trim: 'Closed-loop trim',
  warmup: 'Warm-up enrichment',
  afterStart: 'After-start enrichment',
  accel: 'Acceleration enrichment',
  pulseWidth: 'Injector pulse width',
  battery: 'Battery',
  baro: 'Barometric pressure (BARO)',
}
