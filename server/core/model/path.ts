/** The way of the mixture from injector to reading: film on the wall, transport to the sensor, lag of the sensor. */

/** theta of the estimator's page: what is fitted for each log beside the table. */
export interface MixturePath {
  /** Constant part of the transport, s. */
  readonly t0S: number
  /** Exhaust mass between valve and sensor, kg. */
  readonly massKg: number
  /** First-order lag of the sensor, s. */
  readonly lagS: number
  /** Share of the fuel that lands on the wall, 0 to 1. */
  readonly filmShare: number
  /** Time constant of the film, s. */
  readonly filmTauS: number
}

/** What is believed of an ordinary engine before any log, and how firmly (standard deviations). */
export const usualPath: MixturePath = { t0S: 0.08, massKg: 1.0e-3, lagS: 0.09, filmShare: 0.15, filmTauS: 0.5 }
export const usualPathSd: MixturePath = { t0S: 0.06, massKg: 1.2e-3, lagS: 0.05, filmShare: 0.15, filmTauS: 0.5 }

/** Where one reading spans all of it (slow loggers), nothing of it can be seen. */
export const instantPath: MixturePath = { t0S: 0, massKg: 0, lagS: 0, filmShare: 0, filmTauS: 1 }

/** From injection to reading at a given exhaust flow, s: only this sum is well determined by a log. */
export const totalDelayS = (path: MixturePath, flowKgS: number): number =>
  path.t0S + path.lagS + path.massKg / Math.max(flowKgS, 1e-4)
