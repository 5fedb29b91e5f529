import { body, endpoint, idParam } from '../../../../_endpoint.ts';
import { patchSubmissionSchema } from '@/domain/api/submissions.ts';
import { getSubmissionReport, setSubmissionAirDate } from '@/server/services/submissions.ts';

/** The report of one submission, for either side. */
export const GET = endpoint(async (context, scope) => getSubmissionReport(scope, idParam(context)));

/** Sets or clears the air date. */
export const PATCH = endpoint(async (context, scope) => {
  const { airAt } = await body(context, patchSubmissionSchema);
  return setSubmissionAirDate(scope, idParam(context), airAt);
});
