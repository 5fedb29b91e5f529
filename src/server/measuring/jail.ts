/**
 * The jail of ffmpeg and ffprobe: formats that hold their own sound only, no protocol but local files and pipes, a network
 * namespace of its own where the system allows one, another user than root, limits on memory, processor time, files and
 * processes, and death with whoever started it, also by kill -9. util-linux does all of it.
 */
import { execFile } from 'node:child_process';
import { chown } from 'node:fs/promises';
import { promisify } from 'node:util';
import { log } from '../log.ts';

const run = promisify(execFile);

export interface Limits {
  /** Address space; a decoder that needs more is fed a bomb. */
  memoryBytes: number;
  /** An hour of any codec takes seconds. */
  processorSeconds: number;
}
export const usualLimits: Limits = { memoryBytes: 2 * 1024 ** 3, processorSeconds: 1800 };

/** ffmpeg's own, of one allocation; the largest that was seen to be needed is a hundredth of it. */
const blockBytes = 512 * 1024 ** 2;
/** ffmpeg has some threads each; a user's are counted together. */
const mostProcesses = 512;
const mostOpenFiles = 64;
/** 'nobody' of every Debian (base-passwd). */
const nobody = 65534;

/** Containers that are taken in. Playlists and whatever else opens further files are not among them. */
const containers = [
  ...['aac', 'ac3', 'aiff', 'amr', 'ape', 'asf', 'au', 'avi', 'caf', 'dsf', 'dts', 'eac3', 'flac', 'loas'],
  ...['matroska', 'matroska,webm', 'mov', 'mov,mp4,m4a,3gp,3g2,mj2', 'mp3', 'mpeg', 'mpegts', 'mxf', 'ogg'],
  ...['rf64', 'tta', 'w64', 'wav', 'webm', 'wv'],
];

/** Options that both programs begin with. */
const ownOptions = [
  ...['-v', 'error', '-max_alloc', String(blockBytes), '-protocol_whitelist', 'file,pipe'],
  ...['-format_whitelist', containers.join(',')],
];

/** A way to shut a program in, as this system allows it. */
export interface Jail {
  /** Command that enters namespaces; empty where none is allowed. */
  namespaces: string[];
  /** Becomes another user where it may. Only for files that this user can read: the staged ones. */
  asNobody: boolean;
  /** The system counts processes in a way that bounds this program only. */
  limitsProcesses: boolean;
  /** util-linux is there. */
  limits: boolean;
}

const netOfRoot = ['unshare', '--net', '--'];
const netOfUser = ['unshare', '--user', '--map-root-user', '--net', '--'];
const unjailed: Jail = { namespaces: [], asNobody: false, limitsProcesses: false, limits: false };
const waysOfRoot: Jail[] = [netOfRoot, netOfUser, []].map((namespaces) => ({
  namespaces,
  // Whoever is root in a namespace of one user has no other to become.
  asNobody: namespaces !== netOfUser,
  limitsProcesses: true,
  limits: true,
}));
const waysOfUser: Jail[] = [
  { namespaces: netOfUser, asNobody: false, limitsProcesses: true, limits: true },
  { namespaces: netOfUser, asNobody: false, limitsProcesses: false, limits: true },
];
const leastWay: Jail = { namespaces: [], asNobody: false, limitsProcesses: false, limits: true };

let chosen: Promise<Jail> | null = null;
/** The tightest jail of this system, found by running a shell with a child in it; what is missing is logged once. */
export const findJail = (): Promise<Jail> => (chosen ??= chooseJail());

async function chooseJail(): Promise<Jail> {
  const ways = process.getuid?.() === 0 ? waysOfRoot : waysOfUser;
  for (const jail of [...ways, leastWay])
    if (await holds(jail)) {
      if (jail.namespaces.length === 0)
        log.warn(
          'this system allows no network namespace: ffmpeg is kept from the network by its protocol list only',
        );
      return jail;
    }
  log.warn(
    'util-linux (setpriv, prlimit) is not here: ffmpeg runs without limits and is not ended by kill -9',
  );
  return unjailed;
}

async function holds(jail: Jail): Promise<boolean> {
  const [command, ...args] = [...enter(jail, { staged: true }), 'sh', '-c', 'true & wait $!'];
  try {
    await run(command, args);
    return true;
  } catch {
    // Not allowed here: the next one is tried.
    return false;
  }
}

interface Terms {
  /** The file lies in a private folder, both handed over: the program need not be us. */
  staged: boolean;
  limits?: Limits;
}

/** The words before a program that shut it in. The process stays the same one: its id is the program's. */
export function enter(jail: Jail, { staged, limits = usualLimits }: Terms): string[] {
  if (!jail.limits) return [];
  const { memoryBytes, processorSeconds } = limits;
  const leaving = [
    ...(jail.asNobody && staged ? [`--reuid=${nobody}`, `--regid=${nobody}`, '--clear-groups'] : []),
    // Without its powers root would not be able to read whatever file it names itself.
    ...(process.getuid?.() === 0 && !staged ? [] : ['--bounding-set=-all', '--inh-caps=-all']),
  ];
  // Who is no root and in no namespace of its own has nothing to lay down, and may not.
  const mayLeave = process.getuid?.() === 0 || jail.namespaces.length > 0;
  return [
    ...jail.namespaces,
    // The hard limit of time kills; the soft one lets ffmpeg say what happened.
    ...['prlimit', `--as=${memoryBytes}`, `--cpu=${processorSeconds}:${processorSeconds + 5}`],
    ...['--fsize=0', '--core=0', `--nofile=${mostOpenFiles}`],
    ...(jail.limitsProcesses && (staged || jail.namespaces === netOfUser)
      ? [`--nproc=${mostProcesses}`]
      : []),
    '--',
    // Last, since a change of user or namespace forgets whom to die with.
    ...['setpriv', ...(mayLeave ? leaving : []), '--no-new-privs', '--pdeathsig', 'KILL', '--'],
  ];
}

/** The command that runs a program in the jail, and the whole environment that it is given. */
export async function jailed(program: 'ffmpeg' | 'ffprobe', args: readonly string[], terms: Terms) {
  const [command, ...rest] = [...enter(await findJail(), terms), program, ...ownOptions, ...args];
  return { command, args: rest, env: { PATH: process.env.PATH ?? '/usr/bin:/bin', LC_ALL: 'C' } };
}

/** Gives a staged file, or its folder, to whoever the jailed program is. Throws the file system's error. */
export async function handOver(path: string): Promise<void> {
  if ((await findJail()).asNobody) await chown(path, nobody, nobody);
}

/** The program was not run at all: no fault of the file. Looks like the system's own error of a spawn. */
export class LaunchError extends Error {
  override name = 'LaunchError';
  readonly code: string;
  readonly syscall: string;
  constructor(program: string, said: string) {
    const isMissing = said.includes('No such file or directory');
    super(`spawn ${program} ${isMissing ? 'ENOENT' : 'failed'}: ${said.trim().slice(0, 300)}`);
    this.code = isMissing ? 'ENOENT' : 'EAGAIN';
    this.syscall = `spawn ${program}`;
  }
}

/** Throws LaunchError where the end of a jailed program came before its beginning. */
export function throwIfNotLaunched(program: string, code: number | null, said: string): void {
  if ((code === 126 || code === 127 || code === 1) && /^(setpriv|prlimit|unshare): /.test(said))
    throw new LaunchError(program, said);
}
