import { endpoint, idParam } from '@/pages/_endpoint.ts';
import { takeBackAssignment } from '@/server/services/channels.ts';

export const DELETE = endpoint(async (context, scope) =>
  takeBackAssignment(scope, idParam(context), idParam(context, 'assignmentId')),
);
