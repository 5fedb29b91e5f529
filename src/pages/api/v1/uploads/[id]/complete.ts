import { body, endpoint, idParam } from '../../../../_endpoint.ts';
import { completeUploadSchema } from '@/domain/api/deliverables.ts';
import { completeUpload } from '@/server/services/uploads.ts';

/** Joins the parts and hands the deliverable to measuring; safe to repeat. */
export const POST = endpoint(async (context, scope) => {
  const { sha256 } = await body(context, completeUploadSchema);
  return completeUpload(scope, idParam(context), sha256);
});
