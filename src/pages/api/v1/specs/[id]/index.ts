import { endpoint, idParam } from '@/pages/_endpoint.ts';
import { readSpec } from '@/server/services/specs.ts';

export const GET = endpoint(async (context, scope) => readSpec(scope, idParam(context)));
