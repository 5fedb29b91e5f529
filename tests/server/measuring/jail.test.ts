import { execFileSync, spawn } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { wholeFile } from '../../../src/engine/plan.ts';
import type { ByteSource } from '../../../src/engine/source.ts';
import { networkJail } from '../../../src/server/measuring/jail.ts';
import { measureFile } from '../../../src/server/measuring/measure-source.ts';
import { stage } from '../../../src/server/measuring/staging.ts';
import { StallWatch } from '../../../src/server/measuring/stall-watch.ts';

const folder = mkdtempSync(join(tmpdir(), 'plimsoll-jail-'));
const path = (name: string) => join(folder, name);
const ffmpeg = (...args: string[]) => execFileSync('ffmpeg', ['-v', 'error', '-y', ...args], { cwd: folder });

beforeAll(() => {
  ffmpeg('-f', 'lavfi', '-i', 'sine=frequency=997:duration=3:sample_rate=48000', '-ac', '2', 'tone.wav');
  ffmpeg(
    '-f',
    'lavfi',
    '-i',
    'anoisesrc=color=pink:duration=3:sample_rate=48000:seed=1',
    '-ac',
    '2',
    'noise.wav',
  );
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe('the jail of the decoder', () => {
  it.each([
    ['an HLS playlist that names a file', '#EXTM3U\n#EXTINF:3,\nfile:///etc/hostname\n#EXT-X-ENDLIST\n'],
    [
      'an HLS playlist that names an address',
      '#EXTM3U\n#EXTINF:3,\nhttp://127.0.0.1:9/a.ts\n#EXT-X-ENDLIST\n',
    ],
    ['a list of files to join', "ffconcat version 1.0\nfile 'tone.wav'\n"],
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

  it('has no network but a loopback that is down', async ({ skip }) => {
    const [program, ...options] = await networkJail();
    if (!program) skip('this system allows no network namespace');
    const devices = execFileSync(program, [...options, 'cat', '/proc/net/dev'], { encoding: 'utf8' });
    expect([...devices.matchAll(/^\s*(\S+):/gm)].map(([, name]) => name)).toEqual(['lo']);
    const routes = execFileSync(program, [...options, 'cat', '/proc/net/route'], { encoding: 'utf8' });
    expect(routes.trim().split('\n')).toHaveLength(1);
  });

  it('limits memory and files, and dies with a parent that is killed', async () => {
    execFileSync('mkfifo', [path('never')]);
    const jail = pathToFileURL(join(process.cwd(), 'src/server/measuring/jail.ts')).href;
    const script = `
      import { spawn } from 'node:child_process';
      import { jailed } from '${jail}';
      const { command, args, env } = await jailed('ffmpeg', ['-nostdin', '-i', ${JSON.stringify(path('never'))}, '-f', 'null', '-']);
      const child = spawn(command, args, { env, stdio: 'ignore' });
      console.log(child.pid);
      setInterval(() => {}, 1000);`;
    const parent = spawn(process.execPath, ['--import', 'tsx', '--input-type=module', '-e', script], {
      stdio: ['ignore', 'pipe', 'inherit'],
    });
    const [said] = (await once(parent.stdout, 'data')) as [Buffer];
    const pid = Number(String(said).trim().split('\n').at(-1));
    // The same process becomes ffmpeg once the limits stand.
    await vi.waitFor(() => expect(readFileSync(`/proc/${pid}/comm`, 'utf8').trim()).toBe('ffmpeg'), 20_000);
    const limits = readFileSync(`/proc/${pid}/limits`, 'utf8');
    expect(limits).toMatch(/Max address space\s+2147483648/);
    expect(limits).toMatch(/Max file size\s+16777216/);
    expect(limits).toMatch(/Max cpu time\s+1800/);
    parent.kill('SIGKILL');
    const isGone = () =>
      !existsSync(`/proc/${pid}`) || /\(ffmpeg\) Z/.test(readFileSync(`/proc/${pid}/stat`, 'utf8'));
    await vi.waitFor(() => expect(isGone()).toBe(true), 20_000);
  }, 60_000);

  it('ends a process that gives nothing, and says so', async () => {
    const child = spawn('sleep', ['600']);
    const watch = new StallWatch(child.pid ?? NaN, 0.2);
    const [, signal] = (await once(child, 'close')) as [number | null, string];
    expect(signal).toBe('SIGKILL');
    expect(watch.stalled).toBe(true);
    await watch.end();
  });
});

describe('staging', () => {
  const huge: ByteSource = {
    size: 2 ** 50,
    read: () => Promise.reject(new Error('Nothing is read where there is no room.')),
  };
  it('looks for room before it writes, and says what is missing', async () => {
    const staged = stage(huge, path('staged'), new AbortController().signal);
    await expect(staged).rejects.toMatchObject({ code: 'ENOSPC', syscall: 'statfs' });
    await expect(staged).rejects.toThrow(/Decoding needs \d+ MB of scratch space, \d+ MB are free/);
    expect(existsSync(path('staged'))).toBe(false);
  });
});

describe('containers with several tracks', () => {
  it('lists the audio tracks of a MOV and measures the one that is chosen', async () => {
    ffmpeg(
      ...['-i', 'tone.wav', '-i', 'noise.wav', '-map', '0:a', '-map', '1:a', '-c:a', 'pcm_s24le'],
      ...['-metadata:s:a:0', 'language=eng', 'two.mov'],
    );
    const [[first], [second], [tone], [noise]] = await Promise.all([
      measureFile(path('two.mov')),
      measureFile(path('two.mov'), { plan: { ...wholeFile, stream: 1 } }),
      measureFile(path('tone.wav')),
      measureFile(path('noise.wav')),
    ]);
    expect(first.measurement.figures).toEqual(tone.measurement.figures);
    expect(second.measurement.figures).toEqual(noise.measurement.figures);
    expect(first.measurement.format.streams).toMatchObject([
      { codec: 'PCM', channels: 2, layout: 'stereo', language: 'eng' },
      { codec: 'PCM', channels: 2, layout: 'stereo', language: null },
    ]);
    await expect(measureFile(path('two.mov'), { plan: { ...wholeFile, stream: 2 } })).rejects.toMatchObject({
      code: 'no-such-stream',
      message: 'The file has 2 audio tracks; number 3 is not among them.',
    });
  });
});

describe('what people deliver', () => {
  it.each([
    ['noise.m4a', 'MP4', 'AAC', ['-c:a', 'aac', '-b:a', '256k']],
    ['noise.aac', 'AAC', 'AAC', ['-c:a', 'aac', '-b:a', '256k']],
    ['lossless.m4a', 'MP4', 'ALAC', ['-c:a', 'alac']],
    ['noise.flac', 'FLAC', 'FLAC', []],
    ['noise.mp3', 'MP3', 'MP3', ['-b:a', '320k']],
    ['noise.ogg', 'OGG', 'Vorbis', ['-c:a', 'libvorbis', '-q:a', '8']],
    ['noise.opus', 'OGG', 'Opus', ['-c:a', 'libopus', '-b:a', '256k']],
    ['noise.mov', 'MOV', 'PCM', ['-c:a', 'pcm_s24le']],
    ['noise.mxf', 'MXF', 'PCM', ['-c:a', 'pcm_s24le']],
    ['eight.wav', 'WAV', 'PCM', ['-c:a', 'pcm_u8']],
    ['law.aifc', 'AIFF', 'pcm_mulaw', ['-c:a', 'pcm_mulaw', '-f', 'aiff']],
  ])('measures %s near the WAV that it was made of', async (name, container, _codec, args) => {
    // MXF wants a picture track beside the sound.
    const picture = name.endsWith('.mxf') ? ['-f', 'lavfi', '-i', 'color=c=black:s=720x576:r=25:d=3'] : [];
    ffmpeg('-i', 'noise.wav', ...picture, ...args, '-shortest', name);
    const [[wav], [coded]] = await Promise.all([measureFile(path('noise.wav')), measureFile(path(name))]);
    const { format, figures } = coded.measurement;
    expect(format.container).toBe(container);
    const integrated = (of: typeof wav) => of.measurement.figures.loudness.integratedLufs ?? NaN;
    expect(Math.abs(integrated(coded) - integrated(wav))).toBeLessThan(0.5);
    expect(Math.abs(figures.measuredSeconds - 3)).toBeLessThan(0.1);
  });

  it.each([
    ['a cut MP4', 'noise.m4a', (bytes: Buffer) => bytes.subarray(0, bytes.length >> 1)],
    ['an empty file', 'noise.flac', () => Buffer.alloc(0)],
    ['a picture', 'noise.flac', () => Buffer.from('89504e470d0a1a0a0000000d49484452', 'hex')],
  ])('refuses %s in a sentence', async (_what, name, damage) => {
    writeFileSync(path('damaged'), damage(readFileSync(path(name))));
    const error: unknown = await measureFile(path('damaged')).catch((caught: unknown) => caught);
    expect(error).toMatchObject({ name: 'UnreadableError' });
    const { message } = error as Error;
    expect(message).toMatch(/^[A-Z].*\.$/);
    expect(message).not.toContain(folder);
  });

  it('tells of a FLAC with garbage in its middle, and measures the rest', async () => {
    const bytes = readFileSync(path('noise.flac'));
    bytes.fill(0x55, bytes.length >> 1, (bytes.length >> 1) + 4000);
    writeFileSync(path('garbage.flac'), bytes);
    const [{ measurement }] = await measureFile(path('garbage.flac'));
    expect(measurement.findings.map(({ code }) => code)).toContain('unreadable-part');
  });
});
