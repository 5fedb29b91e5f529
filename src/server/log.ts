import pino from 'pino';

/** One structured log per process, to standard output. Carries no secrets and no bodies. */
export const log = pino({ level: process.env.LOG_LEVEL ?? 'info', base: { pid: process.pid } });
