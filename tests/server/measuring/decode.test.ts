import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { measureFile, measureSource } from '../../../src/server/measuring/measure-source.ts';

const folder = mkdtempSync(join(tmpdir(), 'plimsoll-decode-'));
const path = (name: string) => join(folder, name);
const ffmpeg = (...args: string[]) => execFileSync('ffmpeg', ['-v', 'error', '-y', ...args], { cwd: folder });

/** A programme of 60 s and more whose level wanders: pink noise and a voice-like tone, band-limited to 16 kHz. */
const programme = (name: string, rate: number, layout: string, audioChannels: number, db: number) => {
  const noise = Array.from(
    { length: audioChannels },
    (_, c) => `anoisesrc=color=pink:seed=${c + 1}:duration=64:sample_rate=${rate}[n${c}]`,
  ).join(';');
  const inputs = Array.from({ length: audioChannels }, (_, c) => `[n${c}]`).join('');
  const graph = `${noise};${inputs}join=inputs=${audioChannels}:channel_layout=${layout},lowpass=f=15000:p=2,tremolo=f=0.11:d=0.85,volume=${db}dB`;
  ffmpeg('-filter_complex', graph, '-c:a', 'pcm_s24le', '-ar', String(rate), name);
};

beforeAll(() => {
  programme('stereo.wav', 48_000, 'stereo', 2, 0);
  ffmpeg('-i', 'stereo.wav', 'stereo.flac');
  ffmpeg('-i', 'stereo.wav', '-b:a', '320k', 'stereo.mp3');
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe('decoding by ffmpeg', () => {
  it('gives a FLAC its WAV’s figures to the last bit', async () => {
    const [wav, flac] = await Promise.all([
      measureFile(path('stereo.wav')),
      measureFile(path('stereo.flac')),
    ]);
    expect(flac[0].measurement.figures).toEqual(wav[0].measurement.figures);
    expect(flac[0].measurement.format).toMatchObject({
      container: 'FLAC',
      codec: 'FLAC',
      bitDepth: 24,
      layout: 'stereo',
    });
  });

  it('measures an MP3 from storage as from disk, near its WAV', async () => {
    const bytes = readFileSync(path('stereo.mp3'));
    const source = {
      size: bytes.length,
      read: (offset: number, length: number) => Promise.resolve(bytes.subarray(offset, offset + length)),
    };
    const [stored, local, wav] = await Promise.all([
      measureSource(source, 'any name'),
      measureFile(path('stereo.mp3')),
      measureFile(path('stereo.wav')),
    ]);
    expect(stored[0].measurement).toEqual(local[0].measurement);
    expect(local[0].measurement.format).toMatchObject({ container: 'MP3', codec: 'MP3', bitDepth: null });
    // The encoder scales by 0.95 and cuts the top of the band (measured here, no source).
    expect(
      Math.abs(
        (local[0].measurement.figures.loudness.integratedLufs ?? 0) -
          (wav[0].measurement.figures.loudness.integratedLufs ?? 0),
      ),
    ).toBeLessThan(1);
  });

  it('ends text, and pictures without sound, as unreadable with a sentence', async () => {
    writeFileSync(path('text.wav'), 'this is no audio, whatever it is called');
    await expect(measureFile(path('text.wav'))).rejects.toMatchObject({ code: 'not-audio' });
    ffmpeg('-f', 'lavfi', '-i', 'color=c=black:s=32x32:d=1', '-c:v', 'mpeg4', 'picture.mp4');
    await expect(measureFile(path('picture.mp4'))).rejects.toMatchObject({
      code: 'not-audio',
      message: expect.stringContaining('video') as string,
    });
  });

  it('tells of a FLAC that is cut short', async () => {
    const bytes = readFileSync(path('stereo.flac'));
    writeFileSync(path('cut.flac'), bytes.subarray(0, bytes.length / 2));
    const [{ measurement }] = await measureFile(path('cut.flac'));
    expect(measurement.findings.map((finding) => finding.code)).toContain('truncated');
    expect(measurement.figures.measuredSeconds).toBeLessThan(40);
  });
});

/** What ffmpeg's ebur128 filter says, from its frames' metadata (more decimals than its summary). */
function reference(name: string) {
  const printed = execFileSync(
    'ffmpeg',
    [
      '-hide_banner',
      '-nostats',
      '-i',
      name,
      '-af',
      'ebur128=peak=true:metadata=1,ametadata=print:file=-',
      '-f',
      'null',
      '-',
    ],
    { cwd: folder, encoding: 'utf8', maxBuffer: 64 * 1024 ** 2, stdio: ['ignore', 'pipe', 'ignore'] },
  );
  const last = (key: string) =>
    Number([...printed.matchAll(new RegExp(`lavfi\\.r128\\.${key}=(\\S+)`, 'g'))].at(-1)?.[1]);
  const peaks = [...printed.matchAll(/lavfi\.r128\.true_peaks_ch\d+=(\S+)/g)].map((match) =>
    Number(match[1]),
  );
  return { integrated: last('I'), range: last('LRA'), truePeak: Math.max(...peaks) };
}

describe('against ffmpeg’s ebur128 filter, on the ground that MEASUREMENT names', () => {
  const largest = { integrated: 0, range: 0, truePeak: 0 };
  afterAll(() => {
    if (process.env.PLIMSOLL_TABLE) console.table(largest);
  });
  it.each([
    ['mono', 48_000, 1, -3],
    ['stereo', 48_000, 2, 0],
    ['stereo', 44_100, 2, -6],
    ['5.1', 48_000, 6, -2],
    ['stereo', 96_000, 2, -1],
    ['mono', 32_000, 1, 0],
  ])(
    '%s at %i Hz: integrated within 0.05 LU, range within 0.1 LU, true peak within 0.2 dB',
    async (layout, rate, audioChannels, db) => {
      const name = `against-${layout}-${rate}.wav`;
      programme(name, rate, layout, audioChannels, db);
      const [{ measurement }] = await measureFile(path(name));
      const theirs = reference(name);
      // The filter reports true peaks as linear values.
      const peak = 20 * Math.log10(theirs.truePeak);
      const off = {
        integrated: Math.abs((measurement.figures.loudness.integratedLufs ?? 0) - theirs.integrated),
        range: Math.abs((measurement.figures.loudness.rangeLu ?? 0) - theirs.range),
        truePeak: Math.abs((measurement.figures.truePeak.maxDbtp ?? 0) - peak),
      };
      for (const key of ['integrated', 'range', 'truePeak'] as const)
        largest[key] = Math.max(largest[key], off[key]);
      expect(off.integrated).toBeLessThan(0.05);
      expect(off.range).toBeLessThan(0.1);
      expect(off.truePeak).toBeLessThan(0.2);
    },
  );
});
