/** Every address of the pages, built by a function. */
const vehicle = (vehicleId: string) => `/vehicles/${vehicleId}`

export const paths = {
  bench: () => '/',
  signIn: () => '/sign-in',
  setup: () => '/setup',
  reset: () => '/reset',
  people: () => '/people',
  audit: () => '/audit',
  account: () => '/account',
  notices: () => '/notices',
  mails: () => '/demo/mails',
  vehicles: () => '/vehicles',
  newVehicle: () => '/vehicles/new',
  vehicle,
  engineSheet: (vehicleId: string) => `${vehicle(vehicleId)}/engine-sheet`,
  tables: (vehicleId: string) => `${vehicle(vehicleId)}/tables`,
  logs: (vehicleId: string) => `${vehicle(vehicleId)}/logs`,
  log: (vehicleId: string, logId: string) => `${vehicle(vehicleId)}/logs/${logId}`,
  /** The log's trace around a stretch of the drive, s. */
  logAt: (vehicleId: string, logId: string, fromS: number, toS: number) =>
    `${vehicle(vehicleId)}/logs/${logId}?from=${Math.floor(fromS)}&to=${Math.ceil(toS)}`,
  workbench: (vehicleId: string) => `${vehicle(vehicleId)}/workbench`,
  workbenchStart: (vehicleId: string) => `${vehicle(vehicleId)}/workbench/new`,
  proposal: (vehicleId: string, proposalId: string) => `${vehicle(vehicleId)}/workbench/${proposalId}`,
  carryOver: (vehicleId: string, proposalId: string) => `${vehicle(vehicleId)}/workbench/${proposalId}/carry-over`,
  revisions: (vehicleId: string) => `${vehicle(vehicleId)}/revisions`,
  revision: (vehicleId: string, revisionId: string) => `${vehicle(vehicleId)}/revisions/${revisionId}`,
  compareRevisions: (vehicleId: string, from: string, to: string) =>
    `${vehicle(vehicleId)}/revisions/compare?from=${from}&to=${to}`,
  readBack: (vehicleId: string) => `${vehicle(vehicleId)}/read-back`,
}
