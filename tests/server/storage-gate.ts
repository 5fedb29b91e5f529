/** A proxy before storage that can hold reads back or be cut, so that faults happen when a test says so and not by the clock. */
import { createServer, request, type IncomingMessage, type ServerResponse } from 'node:http';
import type { AddressInfo, Socket } from 'node:net';

export interface StorageGate {
  url: string;
  /** Every connection is refused from now on. */
  cut(): void;
  mend(): void;
  /** Reads that begin at or beyond this byte of an object whose key ends so wait until `release`. */
  holdReads(keyEnd: string, fromByte: number): void;
  release(): void;
  close(): Promise<void>;
}

export async function gateBefore(endpoint: string | undefined): Promise<StorageGate> {
  if (!endpoint) throw new Error('The test set-up gave no TEST_S3_ENDPOINT');
  const target = new URL(endpoint);
  const sockets = new Set<Socket>();
  let away = false;
  let held: { keyEnd: string; fromByte: number } | null = null;
  let waiting: (() => void)[] = [];

  const pass = (from: IncomingMessage, to: ServerResponse) => {
    const onward = request(
      {
        host: target.hostname,
        port: target.port,
        method: from.method,
        path: from.url,
        headers: from.headers,
      },
      (answer) => {
        to.writeHead(answer.statusCode ?? 502, answer.headers);
        answer.pipe(to);
      },
    );
    onward.on('error', () => to.destroy());
    to.on('close', () => onward.destroy());
    from.pipe(onward);
  };

  const server = createServer((from, to) => {
    if (away) return void from.socket.destroy();
    const start = Number(/^bytes=(\d+)-/.exec(from.headers.range ?? '')?.[1] ?? -1);
    const path = new URL(from.url ?? '/', endpoint).pathname;
    if (held && from.method === 'GET' && path.endsWith(held.keyEnd) && start >= held.fromByte)
      waiting.push(() => pass(from, to));
    else pass(from, to);
  });
  server.on('connection', (socket) => {
    sockets.add(socket);
    socket.on('close', () => sockets.delete(socket));
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const { port } = server.address() as AddressInfo;

  const release = () => {
    held = null;
    for (const go of waiting.splice(0)) go();
  };
  return {
    url: `http://127.0.0.1:${port}`,
    cut() {
      away = true;
      for (const socket of sockets) socket.destroy();
    },
    mend() {
      away = false;
    },
    holdReads(keyEnd, fromByte) {
      held = { keyEnd, fromByte };
    },
    release,
    close() {
      waiting = [];
      for (const socket of sockets) socket.destroy();
      return new Promise((resolve, reject) => server.close((error) => (error ? reject(error) : resolve())));
    },
  };
}
