import { endpoint, idParam } from '../../../../_endpoint.ts';
import { getDeliverableAudio } from '@/server/services/passages.ts';

/** Leads to the original in storage, for the browser to play; the address is good for some hours. */
export const GET = endpoint(async (context, scope) => {
  const audio = await getDeliverableAudio(scope, idParam(context));
  if (!audio.ok) return audio;
  return new Response(null, {
    status: 302,
    headers: { location: audio.value.url, 'cache-control': 'no-store' },
  });
});
