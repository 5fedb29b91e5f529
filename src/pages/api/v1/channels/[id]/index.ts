import { patchChannelSchema } from '@/domain/api/specs.ts';
import { body, endpoint, idParam } from '@/pages/_endpoint.ts';
import { changeChannel, readChannel } from '@/server/services/channels.ts';

export const GET = endpoint(async (context, scope) => readChannel(scope, idParam(context)));

export const PATCH = endpoint(async (context, scope) =>
  changeChannel(scope, idParam(context), await body(context, patchChannelSchema)),
);
