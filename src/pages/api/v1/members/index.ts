import { endpoint } from '@/pages/_endpoint.ts';
import { listMembers } from '@/server/services/members.ts';

export const GET = endpoint((_context, scope) => listMembers(scope));
