import { endpoint, idParam } from '@/pages/_endpoint.ts';
import { endSessions } from '@/server/services/members.ts';

export const DELETE = endpoint((context, scope) => endSessions(scope, idParam(context)));
