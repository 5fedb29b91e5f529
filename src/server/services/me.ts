/** Who am I, and which organisation do I work in. */
import type { Me } from '../../domain/api/people.ts';
import { db } from '../db/connection.ts';
import { listOrganisationsOfUser } from '../db/organisations-repository.ts';
import { findLiveSession, moveSession } from '../db/sessions-repository.ts';
import { findUser } from '../db/people-repository.ts';
import { done, refuse, type Answer } from '../refusals.ts';
import type { MemberScope } from '../scope.ts';

export async function readMe(scope: MemberScope): Promise<Answer<Me>> {
  const organisations = await listOrganisationsOfUser(db(), scope, scope.userId);
  return done({
    id: scope.userId,
    name: scope.userName,
    email: scope.email,
    organisation: {
      id: scope.organisationId,
      name: scope.organisationName,
      isSupplier: scope.isSupplier,
      isDistributor: scope.isDistributor,
      timeZone: scope.timeZone,
    },
    roles: [...scope.roles],
    organisations: organisations
      .map(({ id, name }) => ({ id, name }))
      .sort((a, b) => a.name.localeCompare(b.name)),
  });
}

/** The session works for another organisation of the person's from now on; `not_found` for any other. */
export async function changeOrganisation(scope: MemberScope, organisationId: string): Promise<Answer<Me>> {
  if (!(await moveSession(db(), scope, organisationId)))
    return refuse('not_found', 'You are not a member there.');
  const user = await findUser(db(), scope, scope.userId);
  const live = user && (await findLiveSession(db(), scope.sessionId, user.sessionVersion));
  return live ? readMe(live.scope) : refuse('unauthenticated', 'Your session has ended. Sign in again.');
}
