import { patchMemberSchema } from '@/domain/api/people.ts';
import { body, endpoint, idParam } from '@/pages/_endpoint.ts';
import { removeMember, setRoles } from '@/server/services/members.ts';

export const PATCH = endpoint(async (context, scope) => {
  const { roles } = await body(context, patchMemberSchema);
  return setRoles(scope, idParam(context), roles);
});

export const DELETE = endpoint((context, scope) => removeMember(scope, idParam(context)));
