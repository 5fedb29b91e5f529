import { activityQuerySchema } from '@/domain/api/people.ts';
import { endpoint, query } from '@/pages/_endpoint.ts';
import { listActivity } from '@/server/services/activity.ts';

export const GET = endpoint((context, scope) => listActivity(scope, query(context, activityQuerySchema)));
