import { createAssignmentSchema } from '@/domain/api/specs.ts';
import { body, endpoint, idParam } from '@/pages/_endpoint.ts';
import { assignSpec } from '@/server/services/channels.ts';

export const POST = endpoint(async (context, scope) =>
  assignSpec(scope, idParam(context), await body(context, createAssignmentSchema)),
);
