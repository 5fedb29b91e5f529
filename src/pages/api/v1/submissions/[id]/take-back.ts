import { endpoint, idParam } from '../../../../_endpoint.ts';
import { takeBackDecision } from '@/server/services/decisions.ts';

/** Takes the decision back while its mail has not gone; answers the row. */
export const POST = endpoint(async (context, scope) => takeBackDecision(scope, idParam(context)));
