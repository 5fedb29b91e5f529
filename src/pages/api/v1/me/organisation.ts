import { changeOrganisationSchema } from '@/domain/api/people.ts';
import { body, endpoint } from '@/pages/_endpoint.ts';
import { changeOrganisation } from '@/server/services/me.ts';

export const POST = endpoint(async (context, scope) => {
  const { organisationId } = await body(context, changeOrganisationSchema);
  return changeOrganisation(scope, organisationId);
});
