import { body, endpoint, idParam } from '../../../../_endpoint.ts';
import { recordPartSchema, signPartsSchema } from '@/domain/api/deliverables.ts';
import { recordPart, signParts } from '@/server/services/uploads.ts';

/** Addresses to which the browser puts parts. */
export const POST = endpoint(async (context, scope) => {
  const { numbers } = await body(context, signPartsSchema);
  return signParts(scope, idParam(context), numbers);
});

/** Tells that storage took a part. */
export const PUT = endpoint(async (context, scope) =>
  recordPart(scope, idParam(context), await body(context, recordPartSchema)),
);
