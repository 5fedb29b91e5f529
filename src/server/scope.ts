/** Whose eyes a query looks through. Every repository takes one first; nothing reads a tenant table without it. */
import type { Role } from '../domain/vocabulary.ts';
import { allows, type Permission, type Standing } from '../domain/permissions.ts';

/** A signed-in person in the organisation that they work in now. Made by the session only. */
export interface MemberScope extends Standing {
  kind: 'member';
  sessionId: string;
  userId: string;
  userName: string;
  email: string;
  organisationId: string;
  organisationName: string;
  timeZone: string;
  roles: readonly Role[];
}

/** The service itself, at work for no person: workers, sweeps, the seed. Says why, for the log. */
export interface SystemScope {
  kind: 'system';
  why: string;
}

export type Scope = MemberScope | SystemScope;

export const systemScope = (why: string): SystemScope => ({ kind: 'system', why });

/** Whether the scope may do this at all; the system may. */
export const mayDo = (scope: Scope, permission: Permission): boolean =>
  scope.kind === 'system' || allows(scope, permission);
