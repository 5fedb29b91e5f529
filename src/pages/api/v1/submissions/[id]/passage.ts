import { endpoint, idParam } from '../../../../_endpoint.ts';
import { getSubmissionPassage } from '@/server/services/passages.ts';

/** Loudness over time of what was submitted, with excursions beyond the spec version that it froze. */
export const GET = endpoint(async (context, scope) => getSubmissionPassage(scope, idParam(context)));
