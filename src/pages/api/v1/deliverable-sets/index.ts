import { body, endpoint } from '../../../_endpoint.ts';
import { createSetSchema } from '@/domain/api/deliverables.ts';
import { createSet } from '@/server/services/mono-sets.ts';

/** Takes several mono files as one deliverable. */
export const POST = endpoint(async (context, scope) =>
  createSet(scope, await body(context, createSetSchema)),
);
