import { describe, expect, it } from 'vitest';
import { openNative } from '../../src/engine/containers/open.ts';
import { noise, wavOf, type ExtraChunk } from '../signals/wav.ts';

const tone = [noise(1, 4800, 0.1)];
async function formatWith(extra: ExtraChunk[]) {
  const bytes = wavOf(tone, 48_000, 24, null, extra);
  const source = await openNative({
    size: bytes.length,
    read: (offset, length) => Promise.resolve(bytes.subarray(offset, offset + length)),
  });
  return source?.format;
}

/** A bext chunk by EBU Tech 3285 v2.0: time reference at 338, version at 346, loudness from 412. */
function bext(samples: number, version: number, loudness: number[] = []): ExtraChunk {
  const body = new Uint8Array(602);
  const view = new DataView(body.buffer);
  view.setUint32(338, samples % 2 ** 32, true);
  view.setUint32(342, Math.floor(samples / 2 ** 32), true);
  view.setUint16(346, version, true);
  loudness.forEach((value, i) => view.setInt16(412 + 2 * i, value, true));
  return { id: 'bext', body };
}
const ixml = (text: string): ExtraChunk => ({ id: 'iXML', body: new TextEncoder().encode(text) });

describe('what a WAVE says of its programme', () => {
  it('reads start timecode, frame rate and track names', async () => {
    const format = await formatWith([
      bext(10 * 3600 * 48_000, 1),
      ixml(
        `<BWFXML><SPEED><TIMECODE_RATE>25/1</TIMECODE_RATE><TIMECODE_FLAG>NDF</TIMECODE_FLAG></SPEED>
         <TRACK_LIST><TRACK><CHANNEL_INDEX>1</CHANNEL_INDEX><NAME>Boom &amp; lav</NAME></TRACK></TRACK_LIST></BWFXML>`,
      ),
    ]);
    expect(format).toMatchObject({
      startTimeReferenceSamples: 1_728_000_000,
      startTimecode: '10:00:00:00',
      frameRate: '25',
      trackNames: ['Boom & lav'],
    });
    expect(format).not.toHaveProperty('declaredLoudness');
  });

  it('reads the loudness that version 2 declares, 0x7FFF for what is not set', async () => {
    const format = await formatWith([bext(0, 2, [-2312, 745, -105, 0x7fff, -1800])]);
    expect(format?.declaredLoudness).toEqual({
      integratedLufs: -23.12,
      rangeLu: 7.45,
      truePeakDbtp: -1.05,
      momentaryMaxLufs: null,
      shortTermMaxLufs: -18,
    });
  });

  // EBU Tech 3285 v2.0: -99.99 to 99.99, the range not below 0; what lies outside is ignored.
  it('ignores declared loudness that no file can have', async () => {
    const format = await formatWith([bext(0, 2, [-10_000, -1, 9999, 10_000, -9999])]);
    expect(format?.declaredLoudness).toEqual({
      integratedLufs: null,
      rangeLu: null,
      truePeakDbtp: 99.99,
      momentaryMaxLufs: null,
      shortTermMaxLufs: -99.99,
    });
  });

  it('reads the names of tracks by their place, and leaves out a track that never ends', async () => {
    const track = (place: number, name: string) =>
      `<TRACK><INTERLEAVE_INDEX>${place}</INTERLEAVE_INDEX><NAME>${name}</NAME></TRACK>`;
    const format = await formatWith([
      ixml(`${track(3, 'C')}${track(1, 'L')}<TRACK><INTERLEAVE_INDEX>2</INTERLEAVE_INDEX><NAME>R</NAME>`),
    ]);
    expect(format?.trackNames).toEqual(['L', '', 'C']);
  });

  it('takes nothing from chunks that are short, strange or hostile', async () => {
    const bomb = `<!DOCTYPE x [<!ENTITY a "${'b'.repeat(1000)}">]><BWFXML>${'<TRACK>'.repeat(5000)}&a;`;
    const format = await formatWith([{ id: 'bext', body: new Uint8Array(10) }, ixml(bomb)]);
    for (const key of ['startTimecode', 'frameRate', 'trackNames', 'declaredLoudness'])
      expect(format).not.toHaveProperty(key);
    const odd = await formatWith([bext(1, 2, [0, 0, 0, 0, 0]), ixml('<TIMECODE_RATE>12/0</TIMECODE_RATE>')]);
    expect(odd).not.toHaveProperty('declaredLoudness');
    expect(odd).not.toHaveProperty('frameRate');
  });
});
