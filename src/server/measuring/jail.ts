/**
 * The jail of ffmpeg and ffprobe: formats that hold their own sound only, no protocol but local files and pipes, a network
 * namespace of its own where the system allows one, limits on memory, processor time and files written, and death with
 * whoever started it, also by kill -9. util-linux does all of it.
 */
import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { log } from '../log.ts';

const run = promisify(execFile);

/** Address space; a decoder that needs more is fed a bomb. */
const memoryBytes = 2 * 1024 ** 3;
/** An hour of any codec takes seconds. */
const processorSeconds = 1800;
/** Of any file that it writes: its complaints are all. */
const fileBytes = 16 * 1024 ** 2;

/** Containers that are taken in. Playlists and whatever else opens further files are not among them. */
const containers = [
  ...['aac', 'ac3', 'aiff', 'amr', 'ape', 'asf', 'au', 'caf', 'dts', 'eac3', 'flac', 'ipod', 'loas', 'm4a'],
  ...['matroska', 'matroska,webm', 'mov', 'mov,mp4,m4a,3gp,3g2,mj2', 'mp3', 'mpeg', 'mpegts', 'mxf', 'ogg'],
  ...['opus', 'rf64', 'tta', 'w64', 'wav', 'webm', 'wv'],
];

/** Options that both programs begin with. */
export const jailOptions = [
  '-v',
  'error',
  '-protocol_whitelist',
  'file,pipe',
  '-format_whitelist',
  containers.join(','),
];

const namespaces: readonly string[][] = [
  ['unshare', '--net'],
  ['unshare', '--user', '--map-root-user', '--net'],
];

let chosen: Promise<string[]> | null = null;
/** How this system shuts the network out, found by trying; empty where it does not, which is logged once. */
export const networkJail = (): Promise<string[]> => (chosen ??= chooseNetworkJail());

async function chooseNetworkJail(): Promise<string[]> {
  for (const [program, ...options] of namespaces) {
    try {
      await run(program, [...options, 'true']);
      return [program, ...options];
    } catch {
      // Not allowed here: the next one, or none.
    }
  }
  log.warn(
    'this system allows no network namespace: ffmpeg is kept from the network by its protocol list only',
  );
  return [];
}

/** The command that runs a program in the jail, and the environment that it is given. */
export async function jailed(program: 'ffmpeg' | 'ffprobe', args: readonly string[]) {
  const [command, ...rest] = [
    ...(await networkJail()),
    ...['prlimit', `--as=${memoryBytes}`, `--cpu=${processorSeconds}`, `--fsize=${fileBytes}`, '--core=0'],
    // Last, since a change of namespace forgets it.
    ...['setpriv', '--no-new-privs', '--pdeathsig', 'KILL', '--'],
    ...[program, ...jailOptions, ...args],
  ];
  return { command, args: rest, env: { PATH: process.env.PATH ?? '/usr/bin:/bin', LC_ALL: 'C' } };
}
