import { execFile, execFileSync, spawn } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, readFileSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { promisify } from 'node:util';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { DecodedSource, type DecodeTerms } from '../../../src/server/measuring/decoded-source.ts';
import { enter, findJail, usualLimits, type Jail } from '../../../src/server/measuring/jail.ts';
import { measureFile } from '../../../src/server/measuring/measure-source.ts';
import type { Probe } from '../../../src/server/measuring/probe.ts';
import { openDecoded } from '../../../src/server/measuring/staging.ts';

const run = promisify(execFile);
const folder = mkdtempSync(join(tmpdir(), 'plimsoll-jail-'));
const path = (name: string) => join(folder, name);
const ffmpeg = (...args: string[]) => execFileSync('ffmpeg', ['-v', 'error', '-y', ...args], { cwd: folder });
let jail: Jail;

beforeAll(async () => {
  jail = await findJail();
  ffmpeg('-f', 'lavfi', '-i', 'sine=frequency=997:duration=20:sample_rate=48000', '-ac', '2', 'tone.mp3');
  execFileSync('mkfifo', [path('never')]);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** Runs a shell in the jail as the decoder would run on a staged file. */
const inside = (script: string, limits = usualLimits) => {
  const [command, ...args] = [...enter(jail, { staged: true, limits }), 'bash', '-c', script];
  return run(command, args);
};

describe('the jail of the decoder', () => {
  it('lets nobody reach the network, not even this machine', async ({ skip }) => {
    if (jail.namespaces.length === 0) skip('this system allows no network namespace');
    const server = createServer((socket) => socket.end('reached')).listen(0, '127.0.0.1');
    await once(server, 'listening');
    const { port } = server.address() as AddressInfo;
    const attempt = `exec 3<>/dev/tcp/127.0.0.1/${port} && cat <&3`;
    expect((await run('bash', ['-c', attempt])).stdout).toBe('reached');
    await expect(inside(attempt)).rejects.toMatchObject({
      stderr: expect.stringMatching(/Network is unreachable/) as string,
    });
    server.close();
  });

  it('leaves root behind on files that were handed over, and every power with it', async ({ skip }) => {
    if (!jail.asNobody) skip('this system lets nobody become somebody else');
    const { stdout } = await inside('id -u; grep -E "CapEff|CapBnd|NoNewPrivs" /proc/self/status');
    expect(stdout.split(/\s+/).filter((word) => /^\d+$|^[0-9a-f]{16}$/.test(word))).toEqual([
      '65534',
      '0000000000000000',
      '0000000000000000',
      '1',
    ]);
  });

  it('ends what takes more memory than it may', async ({ skip }) => {
    if (!jail.limits) skip('util-linux is not here');
    const eat = (bytes: number) => `x=$(head -c ${bytes} /dev/zero | tr '\\0' x); echo \${#x}`;
    const limits = { ...usualLimits, memoryBytes: 64 * 1024 ** 2 };
    expect((await inside(eat(1000), limits)).stdout.trim()).toBe('1000');
    await expect(inside(eat(100_000_000), limits)).rejects.toMatchObject({
      stderr: expect.stringMatching(/cannot allocate/) as string,
    });
  });

  it('ends what takes more processor time than it may', async ({ skip }) => {
    if (!jail.limits) skip('util-linux is not here');
    const endless = inside('while :; do :; done', { ...usualLimits, processorSeconds: 1 });
    await expect(endless).rejects.toMatchObject({ signal: 'SIGXCPU' });
  });

  it('lets nothing be written to a file', async ({ skip }) => {
    if (!jail.limits) skip('util-linux is not here');
    await run('chmod', ['777', folder]);
    await expect(inside(`echo x > ${path('written')}`)).rejects.toThrow();
    expect(existsSync(path('written')) ? readFileSync(path('written'), 'utf8') : '').toBe('');
  });

  it.each([
    ['an HLS playlist that names a file', '#EXTM3U\n#EXTINF:3,\nfile:///etc/passwd\n#EXT-X-ENDLIST\n'],
    [
      'an HLS playlist that names an address',
      '#EXTM3U\n#EXTINF:3,\nhttp://127.0.0.1:9/a.ts\n#EXT-X-ENDLIST\n',
    ],
    ['a list of files to join', "ffconcat version 1.0\nfile 'tone.mp3'\n"],
    [
      'a session description',
      'v=0\no=- 0 0 IN IP4 127.0.0.1\ns=x\nc=IN IP4 127.0.0.1\nm=audio 5004 RTP/AVP 0\n',
    ],
  ])('opens nothing for %s', async (_what, text) => {
    writeFileSync(path('list.wav'), text);
    await expect(measureFile(path('list.wav'))).rejects.toMatchObject({
      name: 'UnreadableError',
      code: 'not-audio',
    });
  });

  it.each([true, false])('dies with a parent that is killed (file handed over: %s)', async (staged) => {
    const module = pathToFileURL(join(process.cwd(), 'src/server/measuring/jail.ts')).href;
    const script = `
      import { spawn } from 'node:child_process';
      import { jailed } from '${module}';
      const { command, args, env } = await jailed('ffmpeg',
        ['-nostdin', '-i', ${JSON.stringify(path('never'))}, '-f', 'null', '-'], { staged: ${staged} });
      const child = spawn(command, args, { env, stdio: 'ignore' });
      console.log('pid ' + child.pid);
      setInterval(() => {}, 1000);`;
    await run('chmod', ['666', path('never')]);
    await run('chmod', ['711', folder]);
    const parent = spawn(process.execPath, ['--import', 'tsx', '--input-type=module', '-e', script], {
      stdio: ['ignore', 'pipe', 'inherit'],
    });
    let said = '';
    for await (const text of parent.stdout.setEncoding('utf8') as AsyncIterable<string>) {
      said += text;
      if (/pid \d+/.test(said)) break;
    }
    const pid = Number(/pid (\d+)/.exec(said)?.[1]);
    // The same process becomes ffmpeg once the limits stand.
    await vi.waitFor(() => expect(readFileSync(`/proc/${pid}/comm`, 'utf8').trim()).toBe('ffmpeg'), 20_000);
    parent.kill('SIGKILL');
    const isGone = () =>
      !existsSync(`/proc/${pid}`) || /\(ffmpeg\) Z/.test(readFileSync(`/proc/${pid}/stat`, 'utf8'));
    await vi.waitFor(() => expect(isGone()).toBe(true), 20_000);
  });
});

describe('a decoder that does not end as it should', () => {
  const signal = new AbortController().signal;
  const probed: Probe = {
    format: {
      container: 'MP3',
      codec: 'MP3',
      sampleRateHz: 48_000,
      bitDepth: null,
      channels: 2,
      layout: 'stereo',
      durationSeconds: 20,
    },
    layout: { name: 'stereo', speakers: ['L', 'R'], assumed: false },
    streamIndexes: [0],
    sampleFormat: 'flt',
    toldSeconds: null,
    toldToleranceSeconds: 0,
  };
  const source = (name: string, limits: Partial<NonNullable<DecodeTerms['limits']>> = {}) =>
    new DecodedSource(
      path(name),
      probed,
      { countedSeconds: null, lacksEnd: false, isLocked: false },
      { folder, staged: false, limits: { ...usualLimits, ...limits } },
    );
  const framesOf = async (of: DecodedSource, until = signal) => {
    let frames = 0;
    for await (const block of of.blocks(until)) frames += block.frames;
    return frames;
  };

  it('gives all of a sound file, for comparison', async () => {
    expect(Math.abs((await framesOf(source('tone.mp3'))) - 20 * 48_000)).toBeLessThan(2400);
  });

  it('is ended when it stands still, and the file is told to be unreadable', async () => {
    await expect(framesOf(source('never', { stallSeconds: 0.2 }))).rejects.toMatchObject({
      code: 'decoder-too-slow',
      message: expect.stringMatching(/stood still for 0\.2 s/) as string,
    });
  });

  it('is ended when it gives more than any programme holds', async () => {
    await expect(framesOf(source('tone.mp3', { mostSeconds: 10 }))).rejects.toMatchObject({
      code: 'decoder-failed',
      message: expect.stringMatching(/more than .* hours/) as string,
    });
  });

  it('is told from a broken file when memory was what it lacked', async () => {
    await expect(framesOf(source('tone.mp3', { memoryBytes: 48 * 1024 ** 2 }))).rejects.toMatchObject({
      code: 'decoder-failed',
      message: expect.stringMatching(/more memory than a sound file may/) as string,
    });
  });

  it('ends with the measurement that is given up, before it began or in the middle', async () => {
    await expect(framesOf(source('never'), AbortSignal.abort(new Error('given up')))).rejects.toThrow(
      'given up',
    );
    const giveUp = new AbortController();
    const inTheMiddle = async () => {
      for await (const block of source('tone.mp3').blocks(giveUp.signal)) {
        expect(block.frames).toBeGreaterThan(0);
        giveUp.abort(new Error('given up'));
      }
    };
    await expect(inTheMiddle()).rejects.toThrow('given up');
  });

  it('ends with a reader that wants no more', async () => {
    const decoders = () =>
      readFileSync(`/proc/self/task/${process.pid}/children`, 'utf8')
        .split(' ')
        .filter((pid) => pid && readFileSync(`/proc/${pid}/comm`, 'utf8').trim() === 'ffmpeg');
    for await (const block of source('tone.mp3').blocks(signal)) {
      expect(block.frames).toBeGreaterThan(0);
      expect(decoders()).toHaveLength(1);
      break;
    }
    await vi.waitFor(() => expect(decoders()).toEqual([]));
  });

  it('is trouble of the surroundings where it is not installed or is killed from without', async () => {
    const programs = mkdtempSync(join(folder, 'bin-'));
    for (const name of ['setpriv', 'prlimit', 'unshare', 'mkfifo'])
      symlinkSync(execFileSync('which', [name], { encoding: 'utf8' }).trim(), join(programs, name));
    vi.stubEnv('PATH', programs);
    try {
      const bytes = { size: 0, read: () => Promise.resolve(new Uint8Array()) };
      await expect(
        openDecoded(path('tone.mp3'), bytes, { folder, staged: false, signal }),
      ).rejects.toMatchObject({ syscall: 'spawn ffprobe', code: 'ENOENT' });
      await expect(framesOf(source('tone.mp3'))).rejects.toMatchObject({
        syscall: 'spawn ffmpeg',
        code: 'ENOENT',
      });
      writeFileSync(join(programs, 'ffmpeg'), '#!/bin/sh\nkill -9 $$\n', { mode: 0o755 });
      await expect(framesOf(source('tone.mp3'))).rejects.toMatchObject({ syscall: 'ffmpeg' });
    } finally {
      vi.unstubAllEnvs();
    }
  });
});
