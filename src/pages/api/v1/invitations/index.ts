import { inviteSchema } from '@/domain/api/people.ts';
import { body, endpoint } from '@/pages/_endpoint.ts';
import { invite } from '@/server/services/invitations.ts';

export const POST = endpoint(async (context, scope) => invite(scope, await body(context, inviteSchema)));
