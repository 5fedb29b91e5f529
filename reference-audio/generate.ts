/**
 * Writes the signals of this folder and their manifest: `npx tsx reference-audio/generate.ts`. Small forms, mono or stereo at
 * low rates and depths, of signals whose figures a document states. No dither.
 */
import { createHash } from 'node:crypto';
import { writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { wavOf } from '../tests/signals/wav.ts';

type Figure = 'integratedLufs' | 'momentaryMaxLufs' | 'maxDbtp';
interface Entry {
  file: string;
  source: string;
  /** Said where the form is not the document's own. */
  form: string;
  expected: Partial<Record<Figure, number>>;
  tolerance: { plus: number; minus: number };
  planar: Float64Array[];
  sampleRateHz: number;
}

/** Levels in dBFS of the peak, one after the other, the phase running on; `null` is silence. */
function tone(
  hz: number,
  sampleRateHz: number,
  parts: [seconds: number, dbfs: number | null][],
): Float64Array {
  const levels = parts.flatMap(([seconds, dbfs]) =>
    Array.from({ length: Math.round(seconds * sampleRateHz) }, () => (dbfs === null ? 0 : 10 ** (dbfs / 20))),
  );
  return Float64Array.from(levels, (level, n) => level * Math.sin((2 * Math.PI * hz * n) / sampleRateHz));
}

/** A quarter of the rate, its crests between the samples, with fades of 10 ms. */
function between(sampleRateHz: number, peak: number): Float64Array {
  const length = sampleRateHz / 2;
  const fade = sampleRateHz / 100;
  return Float64Array.from({ length }, (_, n) => {
    const taper = Math.min(1, n / fade, (length - 1 - n) / fade);
    return taper * peak * Math.sin((Math.PI * n) / 2 + Math.PI / 4);
  });
}

const loudness = { plus: 0.1, minus: 0.1 };
const low = 32_000;
const case1 = tone(1000, low, [[1.5, -23]]);
const case2 = tone(1000, low, [[1.5, -33]]);
const case13 = tone(1000, low, [
  [0.1, null],
  [0.4, -23],
  [0.5, null],
]);
const anchor = tone(997, low, [[3, 0]]);

const entries: Entry[] = [
  {
    file: 'tone-minus-23.wav',
    source: 'EBU Tech 3341 (2023), Table 1, case 1',
    form: '1.5 s at 32 kHz instead of 20 s at 48 kHz, so that it has no short-term value',
    expected: { integratedLufs: -23, momentaryMaxLufs: -23 },
    tolerance: loudness,
    planar: [case1, case1],
    sampleRateHz: low,
  },
  {
    file: 'tone-minus-33.wav',
    source: 'EBU Tech 3341 (2023), Table 1, case 2',
    form: '1.5 s at 32 kHz instead of 20 s at 48 kHz, so that it has no short-term value',
    expected: { integratedLufs: -33, momentaryMaxLufs: -33 },
    tolerance: loudness,
    planar: [case2, case2],
    sampleRateHz: low,
  },
  {
    file: 'burst-400-ms.wav',
    source: 'EBU Tech 3341 (2023), Table 1, case 13',
    form: 'one burst, at 32 kHz',
    expected: { momentaryMaxLufs: -23 },
    tolerance: loudness,
    planar: [case13, case13],
    sampleRateHz: low,
  },
  {
    file: 'anchor-997-hz.wav',
    source: 'ITU-R BS.1770-5, Annex 1: 997 Hz at 0 dBFS in one front channel reads −3.01',
    form: '3 s, mono, at 32 kHz',
    expected: { integratedLufs: -3.01 },
    tolerance: loudness,
    planar: [anchor],
    sampleRateHz: low,
  },
  {
    file: 'peak-between-samples.wav',
    source: 'EBU Tech 3341 (2023), Table 1, case 16',
    form: '0.5 s, mono',
    expected: { maxDbtp: -6 },
    tolerance: { plus: 0.2, minus: 0.4 },
    planar: [between(48_000, 0.5)],
    sampleRateHz: 48_000,
  },
  {
    file: 'peak-above-full-scale.wav',
    source: 'EBU Tech 3341 (2023), Table 1, case 19',
    form: '0.5 s, mono',
    expected: { maxDbtp: 3 },
    tolerance: { plus: 0.2, minus: 0.4 },
    planar: [between(48_000, 1.41)],
    sampleRateHz: 48_000,
  },
];

const beside = (name: string) => fileURLToPath(new URL(name, import.meta.url));
const manifest = entries.map(({ planar, sampleRateHz, ...entry }) => {
  const bytes = wavOf(planar, sampleRateHz, 16);
  writeFileSync(beside(entry.file), bytes);
  return { sha256: createHash('sha256').update(bytes).digest('hex'), ...entry };
});
writeFileSync(beside('manifest.json'), `${JSON.stringify(manifest, null, 2)}\n`);
