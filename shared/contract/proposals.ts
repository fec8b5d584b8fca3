/** Proposals: what the learner says about each cell, and what a person decides about it. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { cellDecisions, proposalStates } from '../lifecycle.ts'
import { GridShape, Id, Instant, Numbers } from '../wire.ts'
import { Revision } from './tables.ts'
import { VehicleRef } from './vehicles.ts'

export const Held = z.object({ cell: z.number().int(), reason: z.string(), releaseS: z.number().nullable() })
export type Held = z.infer<typeof Held>

/** Delay, lag and film between injector and reading. */
export const MixturePath = z.object({
  t0S: z.number(),
  massKg: z.number(),
  lagS: z.number(),
  filmShare: z.number(),
  filmTauS: z.number(),
})

/** What one log brings to the proposal. */
export const LogShare = z.object({
  logId: Id,
  totalS: z.number(),
  usedS: z.number(),
  /** Seconds left out by reason, such as "fuel cut" or "cold". */
  leftOutS: z.record(z.string(), z.number()),
  path: MixturePath,
  /** What the fit could not explain, one standard deviation, %. */
  noisePct: z.number(),
  driftPct: z.number(),
  /** Chi-square per cell against the other logs; above 2 it speaks of another engine. Null for a lone log. */
  disagreement: z.number().nullable(),
  /** Useful seconds in each cell; empty in proposals learned before it was kept. */
  evidenceS: Numbers.default([]),
})
export type LogShare = z.infer<typeof LogShare>

/** A fault that looks like a wrong table. */
export const Diagnosis = z.object({ kind: z.string(), detail: z.string(), lookAt: z.string() })
export type Diagnosis = z.infer<typeof Diagnosis>

export const ProposalLine = z.object({
  id: Id,
  vehicleId: Id,
  number: z.number().int(),
  state: z.enum(proposalStates),
  /** What the learner is doing, and how far, while it learns. */
  step: z.string(),
  progress: z.number(),
  trouble: z.string().nullable(),
  requestedBy: z.string(),
  requestedAt: Instant,
  base: z.object({ id: Id, number: z.number().int() }),
  /** `used` is false for a log that was switched off. */
  logs: z.array(
    z.object({
      id: Id,
      number: z.number().int(),
      title: z.string(),
      used: z.boolean(),
      /** The day it was recorded, or uploaded where that was not said. */
      drivenOn: z.iso.date(),
    }),
  ),
  counts: z
    .object({ known: z.number(), total: z.number(), open: z.number(), held: z.number(), changed: z.number() })
    .nullable(),
  revisionId: Id.nullable(),
})
export type ProposalLine = z.infer<typeof ProposalLine>

export const Proposal = ProposalLine.extend({
  /** Grows with every decision; send the one you saw, so that nobody's decision is lost silently. */
  version: z.number().int(),
  settings: z.record(z.string(), z.unknown()),
  coreVersion: z.string(),
  surface: z
    .object({
      grid: GridShape,
      current: Numbers,
      /** The fitted surface after the lean guard: what accepting a cell takes. */
      proposed: Numbers,
      /** The fitted surface itself. */
      fitted: Numbers,
      evidenceS: Numbers,
      /** One standard deviation, % of the value. */
      sigmaPct: Numbers,
      misfitPct: Numbers,
      /** The spreadsheet's nearest-cell and bilinear averages, a check by hand. */
      handNearest: Numbers,
      handBilinear: Numbers,
      held: z.array(Held),
      /** Separate visits of each cell. */
      visits: Numbers,
      /** VE by the fuel actually delivered, where pulse width is logged. */
      byPulse: Numbers,
      diagnoses: z.array(Diagnosis),
      /** Those in use only. */
      logs: z.array(LogShare),
      path: MixturePath,
      delay: z.object({ idleS: z.number(), cruiseS: z.number(), fullS: z.number() }),
    })
    .nullable(),
  /** One per cell; `byHand` holds the value where the decision is by hand or pinned by hand. */
  decisions: z.array(z.enum(cellDecisions)),
  byHand: Numbers,
  /** A newer revision of the table than this proposal started from, if there is one. */
  overtakenBy: z.object({ id: Id, number: z.number().int() }).nullable(),
})
export type Proposal = z.infer<typeof Proposal>

export const ProposalRef = z.strictObject({ proposalId: Id })

export const requestProposal = endpoint({
  method: 'POST',
  path: '/api/vehicles/:vehicleId/proposals',
  access: 'proposal:edit',
  summary: 'Learn from logs; the answer is a proposal that fills in the background',
  params: VehicleRef,
  body: z.strictObject({
    logIds: z.array(Id).min(1).max(100),
    /** Largest step of a cell in one revision, %. */
    stepCapPct: z.number().min(1).max(50).default(20),
  }),
  response: Proposal,
})
export const listProposals = endpoint({
  method: 'GET',
  path: '/api/vehicles/:vehicleId/proposals',
  access: 'proposal:read',
  summary: 'Proposals of the vehicle, newest first',
  params: VehicleRef,
  response: z.object({ proposals: z.array(ProposalLine) }),
})
export const getProposal = endpoint({
  method: 'GET',
  path: '/api/proposals/:proposalId',
  access: 'proposal:read',
  summary: 'A proposal with its surface and the decisions so far',
  params: ProposalRef,
  response: Proposal,
})
export const decideCells = endpoint({
  method: 'POST',
  path: '/api/proposals/:proposalId/decisions',
  access: 'proposal:edit',
  summary: 'Accept, keep, set by hand, pin or reopen cells',
  params: ProposalRef,
  body: z.strictObject({
    version: z.number().int(),
    cells: z
      .array(
        z.strictObject({
          cell: z.number().int().min(0),
          decision: z.enum(cellDecisions),
          /** VE in %, needed for by-hand. */
          value: z.number().min(1).max(200).optional(),
        }),
      )
      .min(1)
      .max(4096),
  }),
  response: Proposal,
})
export const cancelProposal = endpoint({
  method: 'POST',
  path: '/api/proposals/:proposalId/cancel',
  access: 'proposal:edit',
  summary: 'Stop learning, or lay an open proposal aside',
  params: ProposalRef,
  response: Proposal,
})
export const makeRevision = endpoint({
  method: 'POST',
  path: '/api/proposals/:proposalId/revision',
  access: 'proposal:edit',
  summary: 'Make a draft revision of the accepted and hand-set cells; open and held cells keep their value',
  params: ProposalRef,
  body: z.strictObject({ version: z.number().int(), note: z.string().max(500).default('') }),
  response: Revision,
})
export const chooseLogs = endpoint({
  method: 'POST',
  path: '/api/proposals/:proposalId/logs',
  access: 'proposal:edit',
  summary: 'Switch logs of the proposal on or off; the surface answers at once, decisions stay',
  params: ProposalRef,
  body: z.strictObject({ version: z.number().int(), logIds: z.array(Id).min(1).max(100) }),
  response: Proposal,
})

export const CellSample = z.object({
  logId: Id,
  timeS: z.number(),
  rpm: z.number(),
  mapKpa: z.number(),
  lambda: z.number(),
  /** VE that would explain the reading by itself, %. */
  ve: z.number(),
  /** Share of the reading that is this cell's, 0 to 1. */
  share: z.number(),
})
export const getCellSamples = endpoint({
  method: 'GET',
  path: '/api/proposals/:proposalId/cells/:cell/samples',
  access: 'proposal:read',
  summary: 'Readings that speak for a cell, thinned evenly',
  params: z.strictObject({ proposalId: Id, cell: z.coerce.number().int().min(0).max(4095) }),
  response: z.object({ samples: z.array(CellSample) }),
})

export const Replay = z.object({
  timeS: z.array(z.number()),
  measured: Numbers,
  target: Numbers,
  /** The model's account of the drive as it was. */
  explained: Numbers,
  /** Lambda with the table tried, closed loop off. */
  predicted: Numbers,
  /** One standard deviation of `predicted`, %. */
  bandPct: Numbers,
  /** Over the whole drive: share of the seconds within 3 % of target. */
  onTarget: z.object({ measured: z.number(), predicted: z.number(), seconds: z.number() }),
})
export type Replay = z.infer<typeof Replay>

export const replayDrive = endpoint({
  method: 'GET',
  path: '/api/proposals/:proposalId/replay',
  access: 'proposal:read',
  summary: 'What a drive would have read with the table as decided so far, the current one or the proposed one',
  params: ProposalRef,
  query: z.strictObject({
    logId: Id,
    table: z.enum(['decided', 'current', 'proposed']).default('decided'),
    fromS: z.coerce.number().min(0).default(0),
    toS: z.coerce.number().min(0).default(1e6),
    points: z.coerce.number().int().min(50).max(2000).default(600),
  }),
  response: Replay,
})

export const MovedCell = z.object({
  cell: z.number().int(),
  rpm: z.number(),
  mapKpa: z.number(),
  /** VE in %: in the revision both started from, in the later revision, and as this proposal decided. */
  base: z.number(),
  theirs: z.number(),
  mine: z.number(),
})
export type MovedCell = z.infer<typeof MovedCell>

export const Moved = z.object({
  version: z.number().int(),
  base: z.object({ id: Id, number: z.number().int() }),
  /** The newest later revision of the table, or null where nothing has moved. */
  onto: z.object({ id: Id, number: z.number().int(), author: z.string(), state: z.string() }).nullable(),
  /** False where the later revision has other axes: then nothing can be carried over, only learned again. */
  sameAxes: z.boolean(),
  /** Both changed it, to different values: a person decides each. */
  contested: z.array(MovedCell),
  /** Only the later revision changed it, or only this proposal did, or both to the same value. */
  theirsOnly: z.array(MovedCell),
  mineOnly: z.array(MovedCell),
})
export type Moved = z.infer<typeof Moved>

export const getMoved = endpoint({
  method: 'GET',
  path: '/api/proposals/:proposalId/moved',
  access: 'proposal:read',
  summary: 'What a later revision has moved under an open proposal, cell by cell',
  params: ProposalRef,
  response: Moved,
})
export const carryOver = endpoint({
  method: 'POST',
  path: '/api/proposals/:proposalId/carry-over',
  access: 'proposal:edit',
  summary:
    'Make a draft from the later revision with the decided cells of this proposal; contested cells are answered one by one',
  params: ProposalRef,
  body: z.strictObject({
    version: z.number().int(),
    /** The later revision that was looked at; a still later one is told, not overlooked. */
    ontoId: Id,
    answers: z.array(z.strictObject({ cell: z.number().int().min(0), take: z.enum(['mine', 'theirs']) })).max(4096),
    note: z.string().max(500).default(''),
  }),
  response: Revision,
})
