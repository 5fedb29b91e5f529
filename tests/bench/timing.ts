/** Runs a process from its start to its end, with its time and the memory of it and its children. */
import { spawn, type ChildProcess } from 'node:child_process';
import { familyOf, usageOf } from './process-facts.ts';
import type { Command } from './programs.ts';

export interface Timing {
  seconds: number;
  /** Largest sum of the resident peaks (VmHWM) of the process and its children; `null` where there is no /proc. */
  peakMegabytes: number | null;
  /** Of all cores, children included: what the work costs, however busy the machine. `null` where there is no /proc. */
  cpuSeconds: number | null;
  stdout: string;
}

const lookEveryMs = 5;
/** Children of a process are looked for seldom: it costs more. */
const looksPerFamily = 10;
const running = new Set<ChildProcess>();

/** Ends what runs, for a bench that is broken off. */
export const stopAll = (): void => running.forEach((child) => child.kill('SIGKILL'));

/** Rejects with what the process said where it fails. `withChildren`: their memory is counted too. */
export function time({ program, args }: Command, withChildren = false): Promise<Timing> {
  return new Promise((resolve, reject) => {
    const began = performance.now();
    const child = spawn(program, args, { stdio: ['ignore', 'pipe', 'pipe'] });
    running.add(child);
    let seconds = 0;
    let peak = 0;
    let cpu = 0;
    let looks = 0;
    let family: number[] = [];
    const look = () => {
      if (child.pid === undefined) return;
      if (looks++ % looksPerFamily === 0) family = withChildren ? familyOf(child.pid) : [child.pid];
      const usages = family.map(usageOf).filter((usage) => usage !== null);
      peak = Math.max(
        peak,
        usages.reduce((sum, { peakMegabytes }) => sum + peakMegabytes, 0),
      );
      cpu = Math.max(
        cpu,
        usages.reduce((sum, { cpuSeconds }) => sum + cpuSeconds, 0),
      );
    };
    const looking = setInterval(look, lookEveryMs);
    let [stdout, stderr] = ['', ''];
    child.stdout.setEncoding('utf8').on('data', (text: string) => (stdout += text));
    child.stderr.setEncoding('utf8').on('data', (text: string) => (stderr += text));
    child.once('exit', () => (seconds = (performance.now() - began) / 1000));
    child.once('error', (error) => {
      clearInterval(looking);
      reject(error);
    });
    child.once('close', (code, signal) => {
      clearInterval(looking);
      running.delete(child);
      if (code === 0)
        return resolve({ seconds, peakMegabytes: peak || null, cpuSeconds: cpu || null, stdout });
      reject(
        new Error(
          `${program} ${args.join(' ')} ended with ${signal ?? code}: ${(stderr || stdout).slice(-1500)}`,
        ),
      );
    });
  });
}

/** Runs the commands in turn, round after round, so that a busy minute of the machine meets all; the best times and largest memory of each. */
export async function bestOf(rounds: number, commands: Command[], withChildren = false): Promise<Timing[]> {
  const best: Timing[] = [];
  for (let round = 0; round < rounds; round++)
    for (const [i, command] of commands.entries()) {
      const now = await time(command, withChildren);
      const before = best[i] ?? now;
      best[i] = {
        seconds: Math.min(before.seconds, now.seconds),
        peakMegabytes:
          now.peakMegabytes === null ? null : Math.max(before.peakMegabytes ?? 0, now.peakMegabytes),
        cpuSeconds: now.cpuSeconds === null ? null : Math.min(before.cpuSeconds ?? Infinity, now.cpuSeconds),
        stdout: now.stdout,
      };
    }
  return best;
}
