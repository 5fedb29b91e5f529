/** Everybody who might knock: each role on each side of a delivery, and a cookie that the door takes for theirs. */
import { encode } from '@auth/core/jwt';
import type { Knex } from 'knex';
import { rolesOfSide } from '../../src/domain/permissions.ts';
import { roles, type Role } from '../../src/domain/vocabulary.ts';
import { config } from '../../src/server/config.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { makeMember, type MadeOrganisation } from '../factories/world.ts';

export interface Standing {
  name: string;
  role: Role;
  side: 'supplier' | 'distributor';
}

export const standings: Standing[] = (['supplier', 'distributor'] as const).flatMap((side) =>
  roles.map((role) => ({ name: `${role} at a ${side}`, role, side })),
);

/** A role that has no work on its side (a mix engineer at a distributor): may come, and may find nothing of theirs. */
export function isIdle({ role, side }: Pick<Standing, 'role' | 'side'>): boolean {
  return !rolesOfSide({ isSupplier: side === 'supplier', isDistributor: side === 'distributor' }).includes(
    role,
  );
}

export const memberOf = (db: Knex, organisation: MadeOrganisation, role: Role): Promise<MemberScope> =>
  makeMember(db, organisation, [role]);

const cookieName = 'authjs.session-token';

/** The cookie that signing in would have set for this session. */
export async function cookieOf(member: MemberScope): Promise<string> {
  const token = await encode({
    token: { sub: member.userId, sid: member.sessionId, sv: 1 },
    secret: config().AUTH_SECRET,
    salt: cookieName,
  });
  return `${cookieName}=${token}`;
}
