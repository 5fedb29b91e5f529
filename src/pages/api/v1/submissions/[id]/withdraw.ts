import { endpoint, idParam } from '../../../../_endpoint.ts';
import { withdrawSubmission } from '@/server/services/submissions.ts';

/** Takes back what awaits review; answers the row. */
export const POST = endpoint(async (context, scope) => withdrawSubmission(scope, idParam(context)));
