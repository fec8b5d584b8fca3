/** Roles and permissions as a table, and the one question asked of it. */

export const roles = ['tuner', 'owner', 'reviewer', 'admin'] as const
export type Role = (typeof roles)[number]

export const permissions = [
  'vehicle:read',
  'vehicle:edit',
  'table:read',
  'table:edit',
  'log:read',
  'log:upload',
  'proposal:read',
  'proposal:edit',
  'revision:submit',
  'revision:sign-off',
  'revision:comment',
  'export:read',
  'people:read',
  'people:manage',
  'workshop:manage',
  'audit:read',
] as const
export type Permission = (typeof permissions)[number]

const read: readonly Permission[] = ['vehicle:read', 'table:read', 'log:read', 'export:read', 'revision:comment']

/** What each role may do; which rows it may do it to is the scope's business (`vehicleScope`). */
export const permissionsOf: Readonly<Record<Role, readonly Permission[]>> = {
  // revision:sign-off is given to tuners only for the lone user's case: the reviews service refuses their own
  // revision unless the workshop allows it.
  tuner: [
    ...read,
    'vehicle:edit',
    'table:edit',
    'log:upload',
    'proposal:read',
    'proposal:edit',
    'revision:submit',
    'revision:sign-off',
    'people:read',
  ],
  owner: read,
  reviewer: [...read, 'proposal:read', 'revision:sign-off', 'people:read', 'audit:read'],
  admin: ['vehicle:read', 'people:read', 'people:manage', 'workshop:manage', 'audit:read'],
}

/** True when any of the roles carries the permission. */
export function can(held: readonly Role[], permission: Permission): boolean {
  return held.some((role) => permissionsOf[role].includes(permission))
}

/** Owners see only the vehicles they are on; everybody else sees the workshop's. */
export function seesWholeWorkshop(held: readonly Role[]): boolean {
  return held.some((role) => role !== 'owner')
}
