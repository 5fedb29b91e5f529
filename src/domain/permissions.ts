/**
 * Who may do what: PRODUCT.md's table as data. Middleware refuses a route that is not in `routes`; services ask `allows`
 * again with the caller's scope. A test walks every route x every role x own and foreign organisation.
 */
import type { Role } from './vocabulary.ts';

export const permissions = {
  'deliverable:read': { roles: ['mix_engineer', 'administrator'], side: 'supplier' },
  'deliverable:upload': { roles: ['mix_engineer'], side: 'supplier' },
  'submission:create': { roles: ['mix_engineer'], side: 'supplier' },
  'submission:withdraw': { roles: ['mix_engineer'], side: 'supplier' },
  /** Both sides read a submission; only the distributor's list is the review queue. */
  'submission:read': {
    roles: ['mix_engineer', 'qc_operator', 'spec_owner', 'administrator'],
    side: 'either',
  },
  'submission:decide': { roles: ['qc_operator'], side: 'distributor' },
  'note:write': { roles: ['mix_engineer', 'qc_operator'], side: 'either' },
  'spec:read': { roles: ['mix_engineer', 'qc_operator', 'spec_owner', 'administrator'], side: 'either' },
  'spec:edit': { roles: ['spec_owner'], side: 'distributor' },
  'channel:read': { roles: ['mix_engineer', 'qc_operator', 'spec_owner', 'administrator'], side: 'either' },
  'channel:edit': { roles: ['spec_owner'], side: 'distributor' },
  'member:read': { roles: ['administrator'], side: 'either' },
  'member:edit': { roles: ['administrator'], side: 'either' },
  'activity:read': { roles: ['mix_engineer', 'qc_operator', 'spec_owner', 'administrator'], side: 'either' },
} as const satisfies Record<string, { roles: readonly Role[]; side: 'supplier' | 'distributor' | 'either' }>;
export type Permission = keyof typeof permissions;

/** The person as the policy sees them: their roles in the organisation that they work in now. */
export interface Standing {
  roles: readonly Role[];
  isSupplier: boolean;
  isDistributor: boolean;
}

/** Whether somebody of this standing may do this at all (which rows is the services' question). */
export function allows(who: Standing, permission: Permission): boolean {
  const { roles, side } = permissions[permission];
  const rightSide = side === 'either' || (side === 'supplier' ? who.isSupplier : who.isDistributor);
  return rightSide && roles.some((role) => (who.roles as readonly string[]).includes(role));
}

/** Roles that have work on a side: mixing at suppliers, review and specs at distributors, administration at both. */
export function rolesOfSide(side: Pick<Standing, 'isSupplier' | 'isDistributor'>): Role[] {
  return [
    ...(side.isSupplier ? (['mix_engineer'] as const) : []),
    ...(side.isDistributor ? (['qc_operator', 'spec_owner'] as const) : []),
    'administrator',
  ];
}

/** Where somebody's work begins. */
export function landingPath(who: Standing): string {
  if (allows(who, 'deliverable:read')) return '/deliverables';
  if (allows(who, 'spec:edit') && !allows(who, 'submission:decide')) return '/specs';
  return '/review';
}

/** What a route asks of its caller: nothing, to be signed in, or a permission. */
export type Need = 'anyone' | 'signed-in' | Permission;
type Method = 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE';

/** Every page and endpoint, by its Astro pattern. Whatever is missing here is refused, and fails a test. */
export const routes: Record<string, Partial<Record<Method, Need>>> = {
  // Pages
  '/': { GET: 'anyone' },
  '/sign-in': { GET: 'anyone', POST: 'anyone' },
  '/sign-out': { POST: 'anyone' },
  '/forgot-password': { GET: 'anyone', POST: 'anyone' },
  '/reset-password/[token]': { GET: 'anyone', POST: 'anyone' },
  '/invitation/[token]': { GET: 'anyone', POST: 'anyone' },
  '/bench': { GET: 'deliverable:upload' },
  '/deliverables': { GET: 'deliverable:read' },
  '/deliverables/add': { GET: 'deliverable:upload' },
  '/deliverables/[id]': { GET: 'deliverable:read', POST: 'submission:create' },
  '/review': { GET: 'submission:read' },
  '/review/[id]': { GET: 'submission:read', POST: 'submission:decide' },
  '/specs': { GET: 'spec:read' },
  '/specs/[id]': { GET: 'spec:read' },
  '/specs/[id]/draft': { GET: 'spec:edit' },
  '/channels': { GET: 'channel:read' },
  '/channels/[id]': { GET: 'channel:read' },
  '/members': { GET: 'member:read' },
  '/activity': { GET: 'activity:read' },
  '/403': { GET: 'anyone' },
  '/404': { GET: 'anyone' },
  '/500': { GET: 'anyone' },
  // Sign-in
  '/api/auth/[...auth]': { GET: 'anyone', POST: 'anyone' },
  '/api/health': { GET: 'anyone' },
  // The API
  '/api/v1/me': { GET: 'signed-in' },
  '/api/v1/me/organisation': { POST: 'signed-in' },
  '/api/v1/events': { GET: 'signed-in' },
  '/api/v1/deliverables': { GET: 'deliverable:read', PATCH: 'deliverable:upload' },
  '/api/v1/deliverables/[id]': { GET: 'deliverable:read', DELETE: 'deliverable:upload' },
  '/api/v1/deliverables/[id]/plan': { PUT: 'deliverable:upload' },
  '/api/v1/deliverables/[id]/passage': { GET: 'deliverable:read' },
  '/api/v1/deliverables/[id]/audio': { GET: 'deliverable:read' },
  '/api/v1/deliverable-sets': { POST: 'deliverable:upload' },
  '/api/v1/programmes': { GET: 'deliverable:read' },
  '/api/v1/uploads': { GET: 'deliverable:upload', POST: 'deliverable:upload' },
  '/api/v1/uploads/[id]': { DELETE: 'deliverable:upload' },
  '/api/v1/uploads/[id]/parts': { POST: 'deliverable:upload', PUT: 'deliverable:upload' },
  '/api/v1/uploads/[id]/complete': { POST: 'deliverable:upload' },
  '/api/v1/submissions': { GET: 'submission:read', POST: 'submission:create' },
  '/api/v1/submissions/decisions': { POST: 'submission:decide' },
  '/api/v1/submissions/[id]': { GET: 'submission:read', PATCH: 'submission:create' },
  '/api/v1/submissions/[id]/passage': { GET: 'submission:read' },
  '/api/v1/submissions/[id]/audio': { GET: 'submission:read' },
  '/api/v1/submissions/[id]/notes': { POST: 'note:write' },
  '/api/v1/submissions/[id]/presence': { POST: 'submission:decide' },
  '/api/v1/submissions/[id]/take-back': { POST: 'submission:decide' },
  '/api/v1/submissions/[id]/withdraw': { POST: 'submission:withdraw' },
  '/api/v1/starting-specs': { GET: 'spec:edit' },
  '/api/v1/specs': { GET: 'spec:read', POST: 'spec:edit' },
  '/api/v1/specs/[id]': { GET: 'spec:read' },
  '/api/v1/specs/[id]/draft': { PUT: 'spec:edit', DELETE: 'spec:edit' },
  '/api/v1/specs/[id]/publish': { POST: 'spec:edit' },
  '/api/v1/channels': { GET: 'channel:read', POST: 'channel:edit' },
  '/api/v1/channels/[id]': { GET: 'channel:read', PATCH: 'channel:edit' },
  '/api/v1/channels/[id]/assignments': { POST: 'channel:edit' },
  '/api/v1/channels/[id]/assignments/[assignmentId]': { DELETE: 'channel:edit' },
  '/api/v1/channels/[id]/agreements': { POST: 'channel:edit' },
  '/api/v1/channels/[id]/agreements/[agreementId]': { DELETE: 'channel:edit' },
  '/api/v1/suppliers': { GET: 'channel:edit' },
  '/api/v1/members': { GET: 'member:read' },
  '/api/v1/members/[id]': { PATCH: 'member:edit', DELETE: 'member:edit' },
  '/api/v1/members/[id]/sessions': { DELETE: 'member:edit' },
  '/api/v1/invitations': { POST: 'member:edit' },
  '/api/v1/invitations/[id]': { DELETE: 'member:edit' },
  '/api/v1/activity': { GET: 'activity:read' },
};
