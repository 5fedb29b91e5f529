import { endpoint, idParam } from '../../../../_endpoint.ts';
import { tellPresence } from '@/server/services/presence.ts';

/** Says that the caller has it open; answers who else has. */
export const POST = endpoint(async (context, scope) => tellPresence(scope, idParam(context)));
