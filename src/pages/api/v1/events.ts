import { endpoint } from '../../_endpoint.ts';
import { openLiveStream } from '@/server/services/live.ts';

/** Server-sent events of the organisation; one stream per browser, however many tabs. */
export const GET = endpoint(async ({ request }, scope) => {
  const answer = await openLiveStream(scope, request.signal);
  if (!answer.ok) return answer;
  return new Response(answer.value, {
    headers: {
      'content-type': 'text/event-stream',
      'cache-control': 'no-cache, no-transform',
      // Proxies of the nginx family would hold events back.
      'x-accel-buffering': 'no',
    },
  });
});
