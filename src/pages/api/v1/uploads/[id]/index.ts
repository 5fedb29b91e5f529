import { endpoint, idParam } from '../../../../_endpoint.ts';
import { abortUpload } from '@/server/services/uploads.ts';

/** Gives an upload up. */
export const DELETE = endpoint(async (context, scope) => abortUpload(scope, idParam(context)));
