// Entry point: the web server. Wraps the built site with what a build cannot know: hosts, limits, headers, a good leave.
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http';
import type { Socket } from 'node:net';
import { closeDb } from '../src/server/db/connection.ts';
import { config } from '../src/server/config.ts';
import { log } from '../src/server/log.ts';
import { closeRedis } from '../src/server/redis.ts';

/** Forms and JSON only: uploads go to storage, never through here. */
const mostBodyBytes = 1024 * 1024;
const graceMilliseconds = 2_000;

process.env.ASTRO_NODE_AUTOSTART = 'disabled';
const entry = new URL('../server/entry.mjs', import.meta.url).href;
const { handler } = (await import(entry)) as { handler: (req: IncomingMessage, res: ServerResponse) => void };

const settings = config();
const hosts = new Set([new URL(settings.APP_ORIGIN).host, ...settings.ALLOWED_HOSTS]);
const sockets = new Set<Socket>();

function refuse(res: ServerResponse, status: number, sentence: string): void {
  res.writeHead(status, { 'content-type': 'text/plain; charset=utf-8', connection: 'close' }).end(sentence);
}

const server = createServer((req, res) => {
  // Whoever is not behind a proxy of ours may write anything into these.
  if (!settings.TRUST_PROXY)
    for (const name of Object.keys(req.headers))
      if (name.startsWith('x-forwarded-')) delete req.headers[name];
  if (!hosts.has((req.headers.host ?? '').toLowerCase()))
    return refuse(res, 421, 'This server does not answer for that host.');
  if (
    Number(req.headers['content-length'] ?? 0) > mostBodyBytes ||
    (req.headers['transfer-encoding'] && req.method !== 'GET')
  )
    return refuse(res, 413, 'This request is larger than anything this address takes.');
  res.setHeader('x-content-type-options', 'nosniff');
  res.setHeader('cross-origin-opener-policy', 'same-origin');
  // A worker is under the policy of its own answer, not its page's: the one that measures may not connect to anything.
  if (req.url?.startsWith('/_astro/measure-worker'))
    res.setHeader('content-security-policy', "default-src 'none'; script-src 'self' 'wasm-unsafe-eval'");
  handler(req, res);
});
server.on('connection', (socket) => {
  sockets.add(socket);
  socket.on('close', () => sockets.delete(socket));
});
server.listen(settings.PORT, settings.HOST, () =>
  log.info({ host: settings.HOST, port: settings.PORT }, 'web server ready'),
);

let leaving = false;
for (const signal of ['SIGTERM', 'SIGINT'] as const)
  process.on(signal, () => {
    if (leaving) return;
    leaving = true;
    log.info({ signal }, 'web server leaves');
    server.close(() => void Promise.allSettled([closeRedis(), closeDb()]).then(() => process.exit(0)));
    server.closeIdleConnections();
    // Event streams never end by themselves.
    setTimeout(() => sockets.forEach((socket) => socket.destroy()), graceMilliseconds).unref();
  });
