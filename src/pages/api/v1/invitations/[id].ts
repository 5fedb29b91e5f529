import { endpoint, idParam } from '@/pages/_endpoint.ts';
import { takeBackInvitation } from '@/server/services/invitations.ts';

export const DELETE = endpoint((context, scope) => takeBackInvitation(scope, idParam(context)));
