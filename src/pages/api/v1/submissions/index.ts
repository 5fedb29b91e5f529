import { body, endpoint, query } from '../../../_endpoint.ts';
import { createSubmissionsSchema, submissionQuerySchema } from '@/domain/api/submissions.ts';
import { createSubmissions, listSubmissions } from '@/server/services/submissions.ts';

/** A page of the submissions that the organisation is a side of: the distributor's queue, the supplier's own. */
export const GET = endpoint(async (context, scope) =>
  listSubmissions(scope, query(context, submissionQuerySchema)),
);

/** Puts deliverables to channels; one answer per item. */
export const POST = endpoint(async (context, scope) => {
  const { items } = await body(context, createSubmissionsSchema);
  return createSubmissions(scope, items);
});
