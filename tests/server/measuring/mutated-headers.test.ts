/**
 * 2,000 damaged or lying headers by a seeded mutator, over every container, through the same door as the service's worker.
 *
 * The rule: a mutated file ends as unreadable with a sentence, or has figures. Where it has figures from fewer seconds than
 * the untouched file's by more than a fifth, while it claims the untouched file's rate, form and count of audio channels, a finding
 * must tell so. A rate, a form or a count that lies cannot be known from the file, and some streams tell no length.
 */
import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, expect, it } from 'vitest';
import { integrityCodes } from '../../../src/engine/figures.ts';
import { measureSource, UnreadableError } from '../../../src/server/measuring/measure-source.ts';
import { noise } from '../../signals/wav.ts';

const folder = mkdtempSync(join(tmpdir(), 'plimsoll-mutated-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** Half a second of a tone, written by ffmpeg. */
function seed(name: string, ...form: string[]): Uint8Array {
  const tone = 'sine=f=997:r=48000:d=0.5,aformat=channel_layouts=stereo';
  execFileSync('ffmpeg', ['-v', 'error', '-y', '-f', 'lavfi', '-i', tone, ...form, name], { cwd: folder });
  // A copy: a Buffer's slice would share its memory.
  return new Uint8Array(readFileSync(join(folder, name)));
}
const native: Record<string, string[]> = {
  'pcm16.wav': ['-c:a', 'pcm_s16le'],
  'float.wav': ['-c:a', 'pcm_f32le'],
  'wide.wav': ['-c:a', 'pcm_s24le', '-rf64', 'always'],
  'pcm.aiff': ['-c:a', 'pcm_s16be'],
  'sowt.aiff': ['-c:a', 'pcm_s16le', '-f', 'aiff'],
};
const decoded: Record<string, string[]> = {
  'a.mp3': ['-c:a', 'libmp3lame'],
  'a.aac': ['-c:a', 'aac'],
  'a.flac': ['-c:a', 'flac'],
  'a.ogg': ['-c:a', 'libvorbis'],
  'a.opus': ['-c:a', 'libopus'],
  'a.mov': ['-c:a', 'pcm_s24le'],
  'a.mp4': ['-c:a', 'aac'],
  // MXF wants a picture beside the sound.
  'a.mxf': ['-f', 'lavfi', '-i', 'color=c=black:s=720x576:r=25:d=0.5', '-c:a', 'pcm_s24le', '-shortest'],
};

/** An ADTS stream tells no length, nor does an MP3 whose encoder's first frame, which counts the others, was changed. */
function tellsLength(name: string, bytes: Uint8Array, seedBytes: Uint8Array): boolean {
  if (name === 'a.aac') return false;
  if (name !== 'a.mp3') return true;
  const info = Buffer.from(seedBytes).indexOf('Info');
  const frame = (of: Uint8Array) => Buffer.from(of.subarray(info - 40, info + 120)).toString('hex');
  return frame(bytes) === frame(seedBytes);
}

const measured = (bytes: Uint8Array) =>
  measureSource(
    {
      size: bytes.length,
      read: (offset, length) => Promise.resolve(bytes.slice(offset, offset + length)),
    },
    'any name',
    { scratchDir: folder, signal: AbortSignal.timeout(60_000) },
  );

/** One to four bytes of the first `head` changed, and every third file cut. */
function mutate(bytes: Uint8Array, head: number, roll: (below: number) => number): Uint8Array {
  const out = bytes.slice(0, roll(3) === 0 ? 20 + roll(bytes.length - 20) : bytes.length);
  for (let k = 0; k <= roll(4); k++) out[roll(Math.min(head, out.length))] = [roll(256), 0, 255][roll(3)];
  return out;
}

async function run(forms: Record<string, string[]>, times: number, head: number) {
  const names = Object.keys(forms);
  const seeds = names.map((name) => seed(name, ...forms[name]));
  const whole = await Promise.all(seeds.map(async (bytes) => (await measured(bytes))[0].measurement));
  const dice = noise(3341, 16 * times, 0.5);
  const ends = { unreadable: 0, figures: 0, slowestMs: 0, slowest: '' };
  const untold: string[] = [];
  let next = 0;
  const worker = async () => {
    for (let i = next++; i < times; i = next++) {
      let at = 16 * i;
      const roll = (below: number) => Math.floor((dice[at++] + 0.5) * below);
      const kind = i % names.length;
      const bytes = mutate(seeds[kind], head, roll);
      const began = performance.now();
      try {
        const [{ measurement }] = await measured(bytes);
        ends.figures++;
        const { format, figures, findings } = measurement;
        const good = whole[kind];
        const alike = (['container', 'codec', 'sampleRateHz', 'channels', 'bitDepth'] as const).every(
          (key) => format[key] === good.format[key],
        );
        const isShort = figures.measuredSeconds < 0.8 * good.figures.measuredSeconds;
        const told = findings.some(({ code }) => (integrityCodes as readonly string[]).includes(code));
        if (alike && isShort && !told && tellsLength(names[kind], bytes, seeds[kind]))
          untold.push(`${names[kind]} ${i}: ${figures.measuredSeconds.toFixed(3)} s`);
      } catch (error) {
        if (!(error instanceof UnreadableError)) throw error;
        ends.unreadable++;
        expect(error.message).toMatch(/\.$/);
      }
      const took = performance.now() - began;
      if (took > ends.slowestMs) Object.assign(ends, { slowestMs: took, slowest: `${names[kind]} ${i}` });
    }
  };
  await Promise.all([worker(), worker()]);
  if (process.env.PLIMSOLL_TABLE) console.table({ ...ends, untold: untold.length });
  expect(untold).toEqual([]);
  expect(ends.unreadable + ends.figures).toBe(times);
  expect(ends.figures).toBeGreaterThan(times / 10);
}

it(
  '1,600 of WAV, RF64, AIFF and AIFF-C neither crash, hang, nor lose audio without a word',
  { timeout: 300_000 },
  () => run(native, 1600, 96),
);

it('400 of MP3, AAC, FLAC, Ogg, Opus, MOV, MP4 and MXF likewise', { timeout: 600_000 }, () =>
  run(decoded, 400, 400),
);
