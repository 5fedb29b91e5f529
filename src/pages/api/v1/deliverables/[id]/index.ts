import { endpoint, idParam } from '../../../../_endpoint.ts';
import { discardDeliverable, getDeliverableReport } from '@/server/services/deliverables.ts';

/** The report of one deliverable. */
export const GET = endpoint(async (context, scope) => getDeliverableReport(scope, idParam(context)));

/** Discards what was never submitted. */
export const DELETE = endpoint(async (context, scope) => discardDeliverable(scope, idParam(context)));
