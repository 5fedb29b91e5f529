import { body, endpoint } from '../../../_endpoint.ts';
import { createUploadsSchema } from '@/domain/api/deliverables.ts';
import { createUploads, listUploads } from '@/server/services/uploads.ts';

/** Uploads that may go on. */
export const GET = endpoint(async (_context, scope) => listUploads(scope));

/** Begins or resumes uploads; one answer per file. */
export const POST = endpoint(async (context, scope) => {
  const { files } = await body(context, createUploadsSchema);
  return createUploads(scope, files);
});
