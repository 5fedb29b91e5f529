import { createChannelSchema } from '@/domain/api/specs.ts';
import { body, endpoint } from '@/pages/_endpoint.ts';
import { createChannel, listChannels } from '@/server/services/channels.ts';

export const GET = endpoint((_context, scope) => listChannels(scope));

export const POST = endpoint(async (context, scope) =>
  createChannel(scope, await body(context, createChannelSchema)),
);
