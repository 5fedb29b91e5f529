// Child processes that end with us: in order when we are asked to, and by the system's hand when we are killed.
import { spawn } from 'node:child_process';
import { createWriteStream, existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';

const canBind = existsSync('/usr/bin/setpriv');

/** Command and arguments under which a program is told by `signal` when this process dies, and runs as `user` if given. */
function bound(command, args, signal, user) {
  if (!canBind) return user ? ['runuser', ['-u', user, '--', command, ...args]] : [command, args];
  const as = user ? ['--reuid', user, '--regid', user, '--init-groups'] : [];
  return ['setpriv', [...as, '--pdeathsig', signal, '--', command, ...args]];
}

/**
 * Starts a program with its output in `logs/<name>.log`. Ctrl-C does not reach it (a group of its own): we end it, in order.
 * With `restart`, an unexpected end is followed by a new start, with growing pauses.
 */
export function startProcess({
  name,
  command,
  args,
  env,
  cwd,
  user,
  logFolder,
  stopSignal = 'SIGTERM',
  restart = false,
  deathSignal = 'TERM',
}) {
  const logFile = join(logFolder, `${name}.log`);
  const [program, programArgs] = bound(command, args, deathSignal, user);
  let child;
  let stopping = false;
  let pause = 500;
  let timer;
  const ended = {};
  ended.promise = new Promise((resolve) => (ended.resolve = resolve));

  const start = () => {
    const log = createWriteStream(logFile, { flags: 'a' });
    child = spawn(program, programArgs, { env, cwd, detached: true, stdio: ['ignore', 'pipe', 'pipe'] });
    child.stdout.pipe(log, { end: false });
    child.stderr.pipe(log, { end: false });
    const began = Date.now();
    child.once('error', (error) => log.write(`${error.message}\n`));
    child.once('close', (code, signal) => {
      log.end();
      if (stopping || !restart) return ended.resolve(signal ?? code);
      if (Date.now() - began > 60_000) pause = 500;
      console.error(
        `${name} ended (${signal ?? code}) and is started again in ${pause / 1000} s; see ${logFile}`,
      );
      timer = setTimeout(start, pause);
      pause = Math.min(pause * 2, 30_000);
    });
  };
  start();

  return {
    name,
    logFile,
    ended: ended.promise,
    get pid() {
      return child.pid;
    },
    lastWords: () =>
      existsSync(logFile) ? readFileSync(logFile, 'utf8').trim().split('\n').slice(-12).join('\n') : '',
    async stop(graceSeconds = 15) {
      stopping = true;
      clearTimeout(timer);
      if (child.exitCode !== null || child.signalCode !== null) return;
      child.kill(stopSignal);
      const patience = setTimeout(() => child.kill('SIGKILL'), graceSeconds * 1000);
      await ended.promise;
      clearTimeout(patience);
    },
  };
}

/** Asks `probe` until it says true. Throws with the process's last words when it ends first, or after `seconds`. */
export async function untilReady(process_, probe, seconds = 60) {
  let over = null;
  void process_.ended.then((how) => (over = how));
  const end = Date.now() + seconds * 1000;
  for (;;) {
    if (await probe()) return;
    if (over !== null)
      throw new Error(`${process_.name} ended (${over}) before it was ready:\n${process_.lastWords()}`);
    if (Date.now() > end)
      throw new Error(`${process_.name} is not ready after ${seconds} s:\n${process_.lastWords()}`);
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
}
