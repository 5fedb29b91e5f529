import { endpoint, idParam, query } from '../../../../_endpoint.ts';
import { submissionPassageQuerySchema } from '@/domain/api/submissions.ts';
import { getSubmissionPassage } from '@/server/services/passages.ts';

/** Loudness over time of what was submitted, with excursions beyond the spec version that it froze. */
export const GET = endpoint(async (context, scope) => {
  const { presentation } = query(context, submissionPassageQuerySchema);
  return getSubmissionPassage(scope, idParam(context), presentation);
});
