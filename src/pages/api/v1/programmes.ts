import { endpoint } from '../../_endpoint.ts';
import { listProgrammes } from '@/server/services/deliverables.ts';

/** Programmes of the organisation with their episodes. */
export const GET = endpoint(async (_context, scope) => listProgrammes(scope));
