import { publishSpecSchema } from '@/domain/api/specs.ts';
import { body, endpoint, idParam } from '@/pages/_endpoint.ts';
import { publishSpec } from '@/server/services/specs.ts';

export const POST = endpoint(async (context, scope) =>
  publishSpec(scope, idParam(context), await body(context, publishSpecSchema)),
);
