import { createSpecSchema } from '@/domain/api/specs.ts';
import { body, endpoint } from '@/pages/_endpoint.ts';
import { createSpec, listSpecs } from '@/server/services/specs.ts';

export const GET = endpoint((_context, scope) => listSpecs(scope));

export const POST = endpoint(async (context, scope) =>
  createSpec(scope, await body(context, createSpecSchema)),
);
