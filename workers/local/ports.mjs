import { createServer } from 'node:net';

const isFree = (port) =>
  new Promise((resolve) => {
    const server = createServer();
    server.once('error', () => resolve(false));
    server.listen({ port, host: '127.0.0.1', exclusive: true }, () => server.close(() => resolve(true)));
  });

/** The wished port, or the next free one of the 200 after it. Throws a clear word where all are taken. */
export async function freePort(wished) {
  for (let port = wished; port < wished + 200; port++) if (await isFree(port)) return port;
  throw new Error(
    `All ports from ${wished} to ${wished + 199} are taken. End what holds them and start again.`,
  );
}

/** A free port wherever the system has one: for tests, whose ports are nobody else's. */
export const anyPort = () =>
  new Promise((resolve, reject) => {
    const server = createServer();
    server.once('error', reject);
    server.listen(0, '127.0.0.1', () => {
      const { port } = server.address();
      server.close(() => resolve(port));
    });
  });
