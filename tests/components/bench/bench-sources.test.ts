// What the bench measures from: a browser's file read in slices, and what a browser decoded. Node has the same Blob.
import { execFile } from 'node:child_process';
import { mkdtemp, readFile, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { previewSentence, tooLarge } from '../../../src/components/bench/browser-decoder.ts';
import { readCodedHead } from '../../../src/components/bench/coded-head.ts';
import { DecodedSource } from '../../../src/components/bench/decoded-source.ts';
import { fileBytes } from '../../../src/components/bench/file-bytes.ts';
import { openNative } from '../../../src/engine/containers/open.ts';
import { measure } from '../../../src/engine/measure.ts';
import { measureFile } from '../../../src/server/measuring/measure-source.ts';

const run = promisify(execFile);
let folder: string;
let master: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'plimsoll-bench-'));
  master = join(folder, 'master.wav');
  // Twelve seconds of noise; what it sounds like does not matter here.
  const noise = 'anoisesrc=color=pink:duration=12:sample_rate=48000:amplitude=0.3:seed=';
  const inputs = [3, 4].flatMap((seed) => ['-f', 'lavfi', '-i', `${noise}${seed}`]);
  const stereo = ['-filter_complex', 'amerge=inputs=2', '-ac', '2', '-c:a', 'pcm_s24le'];
  await run('ffmpeg', ['-v', 'error', ...inputs, ...stereo, master]);
});
afterAll(() => rm(folder, { recursive: true }));

const encode = async (name: string, ...options: string[]) => {
  const path = join(folder, name);
  await run('ffmpeg', ['-v', 'error', '-y', '-i', master, ...options, path]);
  return path;
};
const blobOf = async (path: string) => new Blob([await readFile(path)]);
const headOf = async (path: string) => readCodedHead(fileBytes(await blobOf(path)));

describe('a file read in slices', () => {
  it('measures as the service measures it, bit for bit', async () => {
    const source = await openNative(fileBytes(await blobOf(master)));
    if (!source) throw new Error('A WAV file was not taken for one');
    const [bench] = await measure(source);
    const [service] = await measureFile(master);
    expect(bench).toEqual(service);
  });
});

describe('bytes of a file', () => {
  const bytes = Uint8Array.from({ length: 3_000_000 }, (_, i) => (i * 7919) >> 5);
  // Offset and length: heads, a run through, a jump back, past the end.
  const reads = [
    [0, 12],
    [2_999_990, 100],
    [44, 1_000_000],
    [1_000_044, 1_000_000],
    [10, 20],
    [2_000_044, 1_000_000],
    [3_000_000, 1_000_000],
    [500, 400_000],
    [400_500, 16],
    [400_516, 300_000],
  ];
  it('are those that lie there, in whatever order they are asked for, into a given buffer or not', async () => {
    const source = fileBytes(new Blob([bytes]));
    const into = new Uint8Array(1_000_000);
    for (const [offset, length] of reads)
      for (const given of [undefined, into])
        expect(
          Buffer.compare(await source.read(offset, length, given), bytes.slice(offset, offset + length)),
        ).toBe(0);
  });

  it('are the same where several ask at once', async () => {
    const source = fileBytes(new Blob([bytes]));
    const answers = await Promise.all(reads.map(([offset, length]) => source.read(offset, length)));
    reads.forEach(([offset, length], i) =>
      expect(Buffer.compare(answers[i], bytes.slice(offset, offset + length))).toBe(0),
    );
  });
});

describe('what a browser decoded', () => {
  it('measures as the same samples in a float WAV file do, and is cut by a window as that is', async () => {
    const path = await encode('float.wav', '-c:a', 'pcm_f32le');
    const bytes = await readFile(path);
    const data = bytes.indexOf('data') + 8;
    const frames = (bytes.length - data) / 8;
    const planar = [0, 1].map((channel) =>
      Float32Array.from({ length: frames }, (_, i) => bytes.readFloatLE(data + (i * 2 + channel) * 4)),
    );
    const decoded = { container: 'FLAC', codec: 'FLAC', bitDepth: 24, sampleRateHz: 48_000, planar };
    const plan = { stream: 0, window: { startSeconds: 1.5, endSeconds: 9 }, presentations: null };
    for (const options of [{}, { plan }]) {
      const [own] = await measure(new DecodedSource(decoded), options);
      const [wave] = await measureFile(path, options);
      expect(own.measurement.figures).toEqual(wave.measurement.figures);
      expect(own.series).toEqual(wave.series);
    }
  });
});

describe('the head of a coded file', () => {
  // Each file is ffmpeg's, so what stands in it is known by how it was asked for.
  const cases: [string, string[], object][] = [
    [
      'a.flac',
      ['-c:a', 'flac', '-ar', '44100'],
      { container: 'FLAC', sampleRateHz: 44_100, audioChannels: 2, bitDepth: 24 },
    ],
    [
      'a.mp3',
      ['-c:a', 'libmp3lame', '-b:a', '128k'],
      { container: 'MP3', sampleRateHz: 48_000, audioChannels: 2 },
    ],
    [
      'low.mp3',
      ['-c:a', 'libmp3lame', '-ar', '22050', '-ac', '1'],
      { container: 'MP3', sampleRateHz: 22_050, audioChannels: 1 },
    ],
    [
      'a.m4a',
      ['-c:a', 'aac', '-ar', '44100'],
      { container: 'MP4', codec: 'AAC', sampleRateHz: 44_100, audioChannels: 2 },
    ],
    [
      'a.mov',
      ['-c:a', 'pcm_s24le'],
      { container: 'MOV', codec: 'PCM', sampleRateHz: 48_000, audioChannels: 2 },
    ],
    [
      'a.ogg',
      ['-c:a', 'libvorbis', '-ar', '44100'],
      { container: 'OGG', codec: 'Vorbis', sampleRateHz: 44_100, audioChannels: 2 },
    ],
    [
      'a.opus',
      ['-c:a', 'libopus'],
      { container: 'OGG', codec: 'Opus', sampleRateHz: 48_000, audioChannels: 2 },
    ],
  ];
  it.each(cases)('%s tells its rate, its audio channels and its length', async (name, options, told) => {
    const head = await headOf(await encode(name, ...options));
    expect(head).toMatchObject(told);
    // The master is 12 s long; coders add their own run-in.
    expect(Math.abs((head?.durationSeconds ?? 0) - 12)).toBeLessThan(0.2);
  });

  it('tells nothing of a text, and does not fall over what is cut short or lies', async () => {
    expect(await readCodedHead(fileBytes(new Blob(['The Tallow Road, notes for the mix'])))).toBeNull();
    for (const name of ['a.flac', 'a.mp3', 'a.m4a', 'a.ogg']) {
      const bytes = await readFile(join(folder, name));
      for (let length = 0; length < 200; length += 7)
        await readCodedHead(fileBytes(new Blob([bytes.subarray(0, length)])));
      for (let seed = 1; seed < 200; seed++) {
        const lying = Buffer.from(bytes.subarray(0, 4000));
        lying[(seed * 37) % 600] = (seed * 101) % 256;
        await readCodedHead(fileBytes(new Blob([lying])));
      }
    }
  });
});

describe('what the browser must hold in memory', () => {
  const head = { container: 'MP3', codec: 'MP3', sampleRateHz: 48_000, audioChannels: 2, bitDepth: null };
  it('is refused by its decoded size where the length is known, and by its own where not', () => {
    expect(tooLarge(60e6, { ...head, durationSeconds: 3600 })).toBeNull();
    expect(tooLarge(60e6, { ...head, durationSeconds: 3 * 3600 })).toMatch(/about 4\.1 GB of memory/);
    expect(tooLarge(99e6, null)).toBeNull();
    expect(tooLarge(101e6, { ...head, durationSeconds: null })).toMatch(/up to 100 MB are tried/);
  });

  it('is told for a preview, with the conversion of its rate where there was one', () => {
    expect(previewSentence({ ...head, durationSeconds: 1 }, 48_000)).toBe(
      'A preview: decoded by this browser. The delivery is measured again by the service.',
    );
    expect(previewSentence({ ...head, durationSeconds: 1 }, 44_100)).toMatch(/from 48 kHz to 44\.1 kHz/);
    expect(previewSentence(null, 48_000)).toMatch(/could not be made out/);
  });
});
