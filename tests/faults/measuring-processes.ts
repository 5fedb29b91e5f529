/** Real measuring workers as processes of their own, and what they tell by events: faults are set off by events, not by the clock. */
import { spawn, type ChildProcess } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { Redis } from 'ioredis';
import { liveEventSchema, type LiveEvent } from '../../src/domain/api/people.ts';
import { eventsTopic } from '../../src/server/events.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));

export interface WorkerProcess {
  pid: number;
  kill(signal: NodeJS.Signals): void;
  /** Exit status, or the signal that ended it. */
  ended: Promise<number | NodeJS.Signals>;
}

/** Starts workers/measuring.ts and resolves when it is ready for jobs. */
export async function startWorker(): Promise<WorkerProcess> {
  const child: ChildProcess = spawn(process.execPath, ['--import', 'tsx', 'workers/measuring.ts'], {
    cwd: root,
    env: { ...process.env, LOG_LEVEL: 'info', MEASURE_LOCK_MS: '2000' },
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const ended = new Promise<number | NodeJS.Signals>((resolve) =>
    child.once('exit', (code, signal) => resolve(signal ?? code ?? -1)),
  );
  let said = '';
  await new Promise<void>((resolve, reject) => {
    child.stdout?.on('data', (text: Buffer) => {
      said += text.toString();
      if (said.includes('measuring worker ready')) resolve();
    });
    void ended.then((how) => reject(new Error(`The worker ended with ${how} before it was ready:\n${said}`)));
  });
  if (child.pid === undefined) throw new Error('The worker has no process');
  return { pid: child.pid, kill: (signal) => void child.kill(signal), ended };
}

/** The process that is measuring a deliverable now, by the title that it gives itself. */
export function measuringProcess(deliverableId: string): number | undefined {
  for (const name of readdirSync('/proc')) {
    if (!/^\d+$/.test(name)) continue;
    try {
      if (readFileSync(`/proc/${name}/cmdline`, 'utf8').includes(`plimsoll measuring ${deliverableId}`))
        return Number(name);
    } catch {
      continue; // it ended while we looked
    }
  }
  return undefined;
}

export interface EventLog {
  /** The next event, in order, that fits; those before it are passed over. */
  next(fits: (event: Extract<LiveEvent, { kind: 'deliverable' }>) => boolean): Promise<void>;
  close(): void;
}

/** Listens to an organisation's events of deliverables from now on. */
export async function listenTo(organisationId: string): Promise<EventLog> {
  const redis = new Redis(process.env.REDIS_URL ?? '', { maxRetriesPerRequest: null });
  const heard: LiveEvent[] = [];
  let wake = () => {};
  redis.on('message', (_topic: string, text: string) => {
    heard.push(liveEventSchema.parse(JSON.parse(text)));
    wake();
  });
  await redis.subscribe(eventsTopic(organisationId));
  return {
    async next(fits) {
      for (;;) {
        for (let event = heard.shift(); event; event = heard.shift())
          if (event.kind === 'deliverable' && fits(event)) return;
        await new Promise<void>((resolve) => (wake = resolve));
      }
    },
    close: () => redis.disconnect(),
  };
}
