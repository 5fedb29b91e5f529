import { body, endpoint, query } from '../../../_endpoint.ts';
import { deliverableQuerySchema, patchDeliverablesSchema } from '@/domain/api/deliverables.ts';
import { listDeliverables, patchDeliverables } from '@/server/services/deliverables.ts';

/** A page of the organisation's deliverables. */
export const GET = endpoint(async (context, scope) =>
  listDeliverables(scope, query(context, deliverableQuerySchema)),
);

/** Details of many; one answer per item. */
export const PATCH = endpoint(async (context, scope) => {
  const { items } = await body(context, patchDeliverablesSchema);
  return patchDeliverables(scope, items);
});
