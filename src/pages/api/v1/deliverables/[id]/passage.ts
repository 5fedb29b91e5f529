import { endpoint, idParam, query } from '../../../../_endpoint.ts';
import { passageQuerySchema } from '@/domain/api/deliverables.ts';
import { getDeliverablePassage } from '@/server/services/passages.ts';

/** Loudness over time, with excursions beyond the limits of `specVersionId`. */
export const GET = endpoint(async (context, scope) => {
  const { specVersionId, presentation } = query(context, passageQuerySchema);
  return getDeliverablePassage(scope, idParam(context), specVersionId, presentation);
});
