import { body, endpoint } from '../../../_endpoint.ts';
import { decisionsSchema } from '@/domain/api/submissions.ts';
import { decideSubmissions } from '@/server/services/decisions.ts';

/** Approves, rejects, waives; one answer per item. */
export const POST = endpoint(async (context, scope) => {
  const { items } = await body(context, decisionsSchema);
  return decideSubmissions(scope, items);
});
