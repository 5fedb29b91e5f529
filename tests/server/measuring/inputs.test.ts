import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Measured } from '../../../src/engine/measure.ts';
import { wholeFile } from '../../../src/engine/plan.ts';
import { measureFile } from '../../../src/server/measuring/measure-source.ts';

const folder = mkdtempSync(join(tmpdir(), 'plimsoll-inputs-'));
const path = (name: string) => join(folder, name);
const ffmpeg = (...args: string[]) => execFileSync('ffmpeg', ['-v', 'error', '-y', ...args], { cwd: folder });
/** MXF wants a picture before the sound. */
const picture = ['-f', 'lavfi', '-i', 'color=c=black:s=352x288:r=25:d=4', '-c:v', 'mpeg2video'];
const toFile = (name: string, ...args: string[]) =>
  ffmpeg('-i', 'noise.wav', ...(name.endsWith('.mxf') ? picture : []), ...args, name);
const measured = async (name: string, stream = 0): Promise<Measured> =>
  (await measureFile(path(name), { plan: { ...wholeFile, stream } }))[0];
const codes = ({ measurement }: Measured) => measurement.findings.map(({ code }) => code);
const integrity = ['truncated', 'size-lies', 'unreadable-part', 'not-a-number'];
const faults = (of: Measured) => codes(of).filter((code) => integrity.includes(code));
const integrated = ({ measurement }: Measured) => measurement.figures.loudness.integratedLufs ?? NaN;

beforeAll(() => {
  const noise = (seed: number) => `anoisesrc=color=pink:seed=${seed}:duration=4:sample_rate=48000`;
  ffmpeg(
    ...['-f', 'lavfi', '-i', noise(1), '-f', 'lavfi', '-i', noise(2)],
    ...['-filter_complex', '[0][1]join=inputs=2:channel_layout=stereo', '-c:a', 'pcm_s24le', 'noise.wav'],
  );
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe('samples that are stored whole', () => {
  const kinds: [string, { container: string; codec: string; bitDepth: number }, string[]][] = [
    ['a.flac', { container: 'FLAC', codec: 'FLAC', bitDepth: 24 }, []],
    ['b.m4a', { container: 'MP4', codec: 'ALAC', bitDepth: 24 }, ['-c:a', 'alac', '-sample_fmt', 's32p']],
    ['c.mov', { container: 'MOV', codec: 'PCM', bitDepth: 24 }, ['-c:a', 'pcm_s24le']],
    ['d.mxf', { container: 'MXF', codec: 'PCM', bitDepth: 24 }, ['-c:a', 'pcm_s24le']],
    ['e.wv', { container: 'WV', codec: 'WavPack', bitDepth: 32 }, ['-c:a', 'wavpack', '-sample_fmt', 's32p']],
    ['f.mov', { container: 'MOV', codec: 'PCM', bitDepth: 32 }, ['-c:a', 'pcm_s32be']],
    ['g.mov', { container: 'MOV', codec: 'PCM float', bitDepth: 64 }, ['-c:a', 'pcm_f64le']],
    ['h.mka', { container: 'Matroska', codec: 'PCM', bitDepth: 24 }, ['-c:a', 'pcm_s24le']],
  ];
  it.each(kinds)('give %s its WAV’s figures to the last bit', async (name, format, args) => {
    toFile(name, ...args);
    const [wave, own] = [await measured('noise.wav'), await measured(name)];
    expect(own.measurement.figures.loudness).toEqual(wave.measurement.figures.loudness);
    expect(own.measurement.figures.truePeak).toEqual(wave.measurement.figures.truePeak);
    expect(own.measurement.figures.measuredSeconds).toBe(4);
    expect(own.series).toEqual(wave.series);
    expect(own.measurement.format).toMatchObject({ ...format, layout: 'stereo', durationSeconds: 4 });
    expect(faults(own)).toEqual([]);
  });

  it.each([
    ['i.flac', ['-sample_fmt', 's16'], 16],
    ['j.wav', ['-c:a', 'pcm_u8'], 8],
    ['k.mov', ['-c:a', 'pcm_s16be'], 16],
  ])('of fewer bits are measured as those bits: %s', async (name, args, bitDepth) => {
    toFile(name, ...args);
    ffmpeg('-i', name, '-c:a', 'pcm_f32le', 'floats.wav');
    const [own, floats] = [await measured(name), await measured('floats.wav')];
    expect(own.measurement.format.bitDepth).toBe(bitDepth);
    expect(own.measurement.figures.loudness).toEqual(floats.measurement.figures.loudness);
    expect(own.measurement.figures.truePeak).toEqual(floats.measurement.figures.truePeak);
  });

  it('are cut by a window as their WAV is', async () => {
    toFile('window.flac');
    const plan = { ...wholeFile, window: { startSeconds: 1.2345, endSeconds: 3.5 } };
    const [[wave], [flac]] = [
      await measureFile(path('noise.wav'), { plan }),
      await measureFile(path('window.flac'), { plan }),
    ];
    expect(flac.measurement.figures.loudness).toEqual(wave.measurement.figures.loudness);
    expect(flac.measurement.figures.measuredSeconds).toBe(wave.measurement.figures.measuredSeconds);
    expect(flac.series).toEqual(wave.series);
  });
});

describe('coded samples', () => {
  const kinds: [string, { container: string; codec: string }, string[]][] = [
    ['a.mp3', { container: 'MP3', codec: 'MP3' }, ['-b:a', '320k']],
    ['b.m4a', { container: 'MP4', codec: 'AAC' }, ['-c:a', 'aac', '-b:a', '256k']],
    ['c.aac', { container: 'AAC', codec: 'AAC' }, ['-c:a', 'aac', '-b:a', '256k']],
    ['d.ogg', { container: 'OGG', codec: 'Vorbis' }, ['-c:a', 'libvorbis', '-q:a', '8']],
    ['e.opus', { container: 'OGG', codec: 'Opus' }, ['-c:a', 'libopus', '-b:a', '256k']],
    ['f.mov', { container: 'MOV', codec: 'AAC' }, ['-c:a', 'aac', '-b:a', '256k']],
    ['g.aif', { container: 'AIFF', codec: 'A-law' }, ['-c:a', 'pcm_alaw']],
    ['h.aif', { container: 'AIFF', codec: 'µ-law' }, ['-c:a', 'pcm_mulaw']],
    ['i.mp2', { container: 'MP3', codec: 'MPEG-1 Layer II' }, ['-b:a', '320k']],
    ['j.ac3', { container: 'AC3', codec: 'AC-3' }, ['-c:a', 'ac3', '-b:a', '448k']],
  ];
  it.each(kinds)('of %s measure near their WAV, with nothing missing', async (name, format, args) => {
    toFile(name, ...args);
    const [wave, own] = [await measured('noise.wav'), await measured(name)];
    expect(own.measurement.format).toMatchObject({
      ...format,
      bitDepth: null,
      channels: 2,
      layout: 'stereo',
    });
    if (!format.codec.includes('law')) expect(own.measurement.format.bitRateKbps).toBeGreaterThan(100);
    // Coders cut the top of the band, where pink noise has little (measured here, no source).
    expect(Math.abs(integrated(own) - integrated(wave))).toBeLessThan(0.7);
    expect(Math.abs(own.measurement.figures.measuredSeconds - 4)).toBeLessThan(0.1);
    expect(faults(own)).toEqual([]);
  });
});

describe('5.1', () => {
  beforeAll(() =>
    // Each audio channel softer than the one before, so that any other order shows.
    ffmpeg(
      ...['-f', 'lavfi', '-i', 'anoisesrc=color=pink:seed=1:duration=4:sample_rate=48000,lowpass=f=100'],
      ...['-af', 'pan=5.1|c0=c0|c1=0.7*c0|c2=0.5*c0|c3=0.35*c0|c4=0.25*c0|c5=0.18*c0'],
      ...['-c:a', 'pcm_s24le', 'six-wide.wav'],
    ),
  );
  it.each([
    ['wide.flac', []],
    ['wide.m4a', ['-c:a', 'aac', '-b:a', '640k']],
    ['wide.ac3', ['-b:a', '640k']],
    ['wide.ogg', ['-c:a', 'libvorbis', '-q:a', '9']],
    ['wide.opus', ['-c:a', 'libopus', '-b:a', '510k']],
    ['wide.mov', ['-c:a', 'pcm_s24le']],
  ])('keeps every loudspeaker in its place: %s', async (name, args) => {
    ffmpeg('-i', 'six-wide.wav', ...args, name);
    const { presentation, measurement } = await measured(name);
    expect(measurement.format.layout).toBe('5.1');
    expect(presentation.speakers).toEqual(['L', 'R', 'C', 'LFE', 'Ls', 'Rs']);
    expect(codes({ measurement } as Measured)).not.toContain('layout-assumed');
    const peaks = measurement.figures.truePeak.perChannelDbtp.map((peak) => peak ?? -Infinity);
    expect(peaks).toEqual([...peaks].sort((a, b) => b - a));
  });
});

describe('files that are damaged', () => {
  beforeAll(() => {
    toFile('whole.mp3', '-b:a', '192k');
    toFile('whole.flac');
    toFile('whole.ogg', '-c:a', 'libvorbis');
    toFile('whole.opus', '-c:a', 'libopus');
    toFile('whole.m4a', '-c:a', 'aac');
    toFile('index-first.m4a', '-c:a', 'aac', '-movflags', 'faststart');
    toFile('whole.mov', '-c:a', 'pcm_s24le');
    toFile('whole.mxf', '-c:a', 'pcm_s24le');
  });
  const half = (bytes: Buffer) => bytes.subarray(0, bytes.length >> 1);
  const rubbish = (bytes: Buffer) => {
    const middle = bytes.length >> 1;
    return Buffer.concat([
      bytes.subarray(0, middle),
      Buffer.alloc(4000, 0x55),
      bytes.subarray(middle + 4000),
    ]);
  };
  const write = (name: string, damage: (bytes: Buffer) => Buffer) => {
    writeFileSync(path('damaged'), damage(readFileSync(path(name))));
    return 'damaged';
  };

  it.each(['whole.mp3', 'whole.flac', 'whole.ogg', 'whole.opus', 'index-first.m4a', 'whole.mxf'])(
    'are measured as far as they go and told to be cut short: %s',
    async (name) => {
      const own = await measured(write(name, half));
      expect(faults(own)).toContain('truncated');
      expect(own.measurement.figures.measuredSeconds).toBeGreaterThan(1);
      expect(own.measurement.figures.measuredSeconds).toBeLessThan(3);
    },
  );

  it.each(['whole.mp3', 'whole.flac', 'index-first.m4a'])(
    'tell of rubbish in their middle, and the rest is measured: %s',
    async (name) => {
      const own = await measured(write(name, rubbish));
      expect(faults(own)).toContain('unreadable-part');
      expect(own.measurement.figures.measuredSeconds).toBeGreaterThan(2);
    },
  );

  it('tell of a single edit unit that an MXF lost', async () => {
    const own = await measured(
      write('whole.mxf', (bytes) => {
        const at = bytes.length >> 1;
        return Buffer.concat([bytes.subarray(0, at), bytes.subarray(at + 3000)]);
      }),
    );
    expect(own.measurement.figures.measuredSeconds).toBeCloseTo(4 - 1 / 25, 6);
    expect(faults(own)).toContain('truncated');
  });

  it('tell of more sound than they admit to', async () => {
    const own = await measured(write('whole.mp3', (bytes) => Buffer.concat([bytes, bytes])));
    expect(faults(own)).toContain('size-lies');
    expect(own.measurement.figures.measuredSeconds).toBeGreaterThan(7);
  });

  const refused: [string, string, string, (bytes: Buffer) => Buffer, RegExp][] = [
    ['a cut MP4', 'header-broken', 'whole.m4a', half, /index is missing/],
    ['a cut MOV', 'header-broken', 'whole.mov', half, /index is missing/],
    ['an empty file', 'empty', 'whole.flac', () => Buffer.alloc(0), /empty/],
    [
      'text',
      'not-audio',
      'whole.flac',
      () => Buffer.from('Shopping: salt, twine, lamp oil.'),
      /not an audio/,
    ],
    ['one byte', 'not-audio', 'whole.flac', (bytes) => bytes.subarray(0, 1), /not an audio/],
  ];
  it.each(refused)('are refused in a sentence: %s', async (_what, code, name, damage, words) => {
    const error: unknown = await measured(write(name, damage)).catch((caught: unknown) => caught);
    expect(error).toMatchObject({ name: 'UnreadableError', code });
    const { message } = error as Error;
    expect(message).toMatch(words);
    expect(message).toMatch(/^[A-Z].*\.$/);
    expect(message).not.toContain(folder);
  });

  const noSound: [string, string[], RegExp][] = [
    ['still.png', ['-frames:v', '1'], /picture/],
    ['still.jpg', ['-frames:v', '1'], /picture/],
    ['silent-film.mp4', ['-c:v', 'mpeg4'], /only video/],
  ];
  it.each(noSound)('are refused where there is only a picture: %s', async (name, args, words) => {
    ffmpeg('-f', 'lavfi', '-i', 'color=c=black:s=32x32:d=1', ...args, name);
    await expect(measured(name)).rejects.toMatchObject({
      code: 'not-audio',
      message: expect.stringMatching(words) as string,
    });
  });

  it('are refused where they are locked, and it says so', async () => {
    const key = '76a6c65c5ea762046bd749a2e632ccbb';
    toFile(
      ...(['locked.mp4', '-c:a', 'aac', '-encryption_scheme', 'cenc-aes-ctr'] as const),
      ...['-encryption_key', key, '-encryption_kid', key],
    );
    await expect(measured('locked.mp4')).rejects.toMatchObject({
      code: 'decoder-failed',
      message: expect.stringMatching(/encrypted.*without copy protection/) as string,
    });
  });
});

describe('containers with several tracks', () => {
  it('list them, and the one that is chosen is measured', async () => {
    ffmpeg('-i', 'noise.wav', '-af', 'volume=-10dB', '-c:a', 'pcm_s24le', 'soft.wav');
    ffmpeg(
      ...['-i', 'noise.wav', '-i', 'soft.wav', '-map', '0:a', '-map', '1:a', '-c:a', 'pcm_s24le'],
      ...['-metadata:s:a:0', 'language=eng', '-metadata:s:a:1', 'handler_name=Music and effects', 'two.mov'],
    );
    const [first, second] = [await measured('two.mov'), await measured('two.mov', 1)];
    expect(first.measurement.figures).toEqual((await measured('noise.wav')).measurement.figures);
    expect(second.measurement.figures).toEqual((await measured('soft.wav')).measurement.figures);
    expect(first.measurement.format.streams).toEqual([
      { codec: 'PCM', channels: 2, layout: 'stereo', language: 'eng', title: null },
      { codec: 'PCM', channels: 2, layout: 'stereo', language: null, title: 'Music and effects' },
    ]);
    await expect(measured('two.mov', 2)).rejects.toMatchObject({
      code: 'no-such-stream',
      message: 'The file has 2 audio tracks; number 3 is not among them.',
    });
    await expect(measured('whole.flac', 1)).rejects.toMatchObject({
      code: 'no-such-stream',
      message: 'The file has 1 audio track; number 2 is not among them.',
    });
  });

  /** Six mono tracks of different level, so that a wrong order shows. */
  const six = Array.from({ length: 6 }, (_, c) => c);
  const split = [
    `[0:a]asplit=6${six.map((c) => `[s${c}]`).join('')}`,
    ...six.map((c) => `[s${c}]pan=mono|c0=${(0.9 - 0.1 * c).toFixed(1)}*c${c % 2}[m${c}]`),
  ].join(';');
  const monos = six.flatMap((c) => ['-map', `[m${c}]`]);

  it('that keep each audio channel in a mono track are read as one, in order', async () => {
    ffmpeg(
      ...['-i', 'noise.wav', '-filter_complex'],
      `${split};${six.map((c) => `[m${c}]`).join('')}amerge=inputs=6`,
      ...['-c:a', 'pcm_s24le', 'six.wav'],
    );
    ffmpeg(
      '-i',
      'noise.wav',
      ...picture,
      '-filter_complex',
      split,
      '-map',
      '1:v',
      ...monos,
      '-c:a',
      'pcm_s24le',
      'six.mxf',
    );
    const [wave, mxf] = [await measured('six.wav'), await measured('six.mxf')];
    expect(mxf.measurement.format).toMatchObject({ container: 'MXF', channels: 6, layout: '5.1' });
    expect(mxf.measurement.format.streams).toBeUndefined();
    expect(mxf.measurement.figures.truePeak).toEqual(wave.measurement.figures.truePeak);
    expect(mxf.measurement.figures.loudness).toEqual(wave.measurement.figures.loudness);
    expect(codes(mxf)).toContain('layout-assumed');
  });

  it('are split where a stereo track or another language stands between', async () => {
    ffmpeg(
      ...['-i', 'noise.wav', '-filter_complex', split, '-map', '0:a', ...monos, '-c:a', 'pcm_s24le'],
      ...[5, 6].map((c) => [`-metadata:s:a:${c}`, 'language=fra']).flat(),
      'mixed.mov',
    );
    const stereo = await measured('mixed.mov');
    expect(stereo.measurement.format.streams).toMatchObject([
      { channels: 2, layout: 'stereo' },
      { channels: 4, layout: '4 channels' },
      { channels: 2, layout: 'stereo', language: 'fra' },
    ]);
    expect(stereo.measurement.figures).toEqual((await measured('noise.wav')).measurement.figures);
    expect((await measured('mixed.mov', 2)).measurement.figures.truePeak.perChannelDbtp).toHaveLength(2);
  });
});
