/** What Linux tells in /proc of a process that runs. Everything answers nothing where it has ended or there is no /proc. */
import { readdirSync, readFileSync } from 'node:fs';

export interface Usage {
  /** Largest resident memory so far (VmHWM), in MiB. */
  peakMegabytes: number;
  /** Of user and system, by itself and by children that it has waited for. */
  cpuSeconds: number;
}

/** Of every Linux that Node runs on: clock ticks are told in hundredths (from memory). */
const ticksPerSecond = 100;

const read = (path: string): string => {
  try {
    return readFileSync(path, 'utf8');
  } catch {
    return '';
  }
};

/** Fields of /proc/PID/stat from the third on; the second is a name in brackets and may hold anything. */
const statOf = (pid: number): number[] => {
  const stat = read(`/proc/${pid}/stat`);
  return stat
    .slice(stat.lastIndexOf(')') + 2)
    .split(' ')
    .map(Number);
};

/** `null` where nothing is told. */
export function usageOf(pid: number): Usage | null {
  const kilobytes = /^VmHWM:\s+(\d+)/m.exec(read(`/proc/${pid}/status`))?.[1];
  const stat = statOf(pid);
  if (kilobytes === undefined || stat.length < 15) return null;
  // utime, stime, cutime, cstime: fields 14 to 17.
  const ticks = stat.slice(11, 15).reduce((sum, x) => sum + x, 0);
  return { peakMegabytes: Number(kilobytes) / 1024, cpuSeconds: ticks / ticksPerSecond };
}

/** The process and all that descend from it. */
export function familyOf(pid: number): number[] {
  const children = new Map<number, number[]>();
  for (const name of namesInProc()) {
    const parent = statOf(Number(name))[1];
    children.set(parent, [...(children.get(parent) ?? []), Number(name)]);
  }
  const family = [pid];
  for (const one of family) family.push(...(children.get(one) ?? []));
  return family;
}

function namesInProc(): string[] {
  try {
    return readdirSync('/proc').filter((name) => /^\d+$/.test(name));
  } catch {
    return [];
  }
}
