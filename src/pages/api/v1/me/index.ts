import { endpoint } from '@/pages/_endpoint.ts';
import { readMe } from '@/server/services/me.ts';

export const GET = endpoint((_context, scope) => readMe(scope));
