/**
 * What a WAVE file says of its programme beside the samples: the bext chunk (EBU Tech 3285 v2.0) and iXML (from secondary
 * sources). All of it is a claim: wrong or strange parts are left out, none of it ends a measurement.
 */
import type { AudioFormat, DeclaredLoudness } from '../figures.ts';
import { framesOfSeconds, formatTimecode, frameRateOf } from '../timecode.ts';

/** Bytes of either chunk that are looked at. */
export const bextBytes = 602;
export const ixmlBytes = 256 * 1024;
const mostTrackNames = 64;

/** Hundredths beyond it, such as 0x7FFF for a field that is not set, are to be ignored (EBU Tech 3285 v2.0). */
const mostHundredths = 9999;

/** Samples since midnight, and the loudness that version 2 declares. */
export function readBext(bytes: Uint8Array): {
  timeReferenceSamples: number | null;
  declaredLoudness: DeclaredLoudness | null;
} {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  if (bytes.length < 348) return { timeReferenceSamples: null, declaredLoudness: null };
  const timeReferenceSamples = view.getUint32(338, true) + view.getUint32(342, true) * 2 ** 32;
  const version = view.getUint16(346, true);
  const hundredths = (offset: number, least = -mostHundredths) => {
    const value = view.getInt16(offset, true);
    return value < least || value > mostHundredths ? null : value / 100;
  };
  const declared =
    version >= 2 && bytes.length >= 422
      ? {
          integratedLufs: hundredths(412),
          rangeLu: hundredths(414, 0),
          truePeakDbtp: hundredths(416),
          momentaryMaxLufs: hundredths(418),
          shortTermMaxLufs: hundredths(420),
        }
      : null;
  // All zeros is what a writer leaves that sets nothing.
  const said = declared && Object.values(declared).some((value) => value !== null && value !== 0);
  return {
    timeReferenceSamples: Number.isSafeInteger(timeReferenceSamples) ? timeReferenceSamples : null,
    declaredLoudness: said ? declared : null,
  };
}

const entities: Record<string, string> = { lt: '<', gt: '>', amp: '&', quot: '"', apos: "'" };
const plainText = (xml: string) =>
  xml.replace(/&(lt|gt|amp|quot|apos);/g, (_, name: string) => entities[name]).trim();

/** Frame rate and track names. Knows the few elements that it needs and expands nothing. */
export function readIxml(bytes: Uint8Array): Pick<AudioFormat, 'frameRate' | 'trackNames'> {
  const xml = new TextDecoder('utf-8').decode(bytes);
  const inside = (name: string, text: string) =>
    new RegExp(`<${name}>([^<]{0,400})</${name}>`).exec(text)?.[1] ?? null;
  const [top, bottom = '1'] = (inside('TIMECODE_RATE', xml) ?? '').split('/');
  const perSecond = Number(top) / Number(bottom);
  const frameRate =
    perSecond > 0 ? frameRateOf(perSecond, inside('TIMECODE_FLAG', xml)?.trim() === 'DF') : null;
  // Cut at the tags and not matched across them, so that a hostile text takes no longer than its length.
  const tracks = xml
    .split('<TRACK>')
    .slice(1, 1 + mostTrackNames)
    .filter((track) => track.includes('</TRACK>'));
  const trackNames: string[] = [];
  for (const opened of tracks) {
    const track = opened.slice(0, opened.indexOf('</TRACK>'));
    const place = Number(inside('INTERLEAVE_INDEX', track) ?? inside('CHANNEL_INDEX', track) ?? NaN);
    const name = plainText(inside('NAME', track) ?? '').slice(0, 80);
    if (Number.isInteger(place) && place >= 1 && place <= mostTrackNames) trackNames[place - 1] = name;
  }
  return {
    ...(frameRate && { frameRate }),
    ...(trackNames.length > 0 && { trackNames: Array.from(trackNames, (name) => name ?? '') }),
  };
}

/** The facts that both chunks tell together; the timecode of the first sample needs a frame rate. */
export function programmeFacts(
  sampleRateHz: number,
  bext: Uint8Array | null,
  ixml: Uint8Array | null,
): Partial<AudioFormat> {
  const { timeReferenceSamples, declaredLoudness } = bext
    ? readBext(bext)
    : { timeReferenceSamples: null, declaredLoudness: null };
  const { frameRate, trackNames } = ixml ? readIxml(ixml) : {};
  return {
    ...(timeReferenceSamples !== null && { startTimeReferenceSamples: timeReferenceSamples }),
    ...(frameRate && { frameRate }),
    ...(timeReferenceSamples !== null &&
      frameRate && {
        startTimecode: formatTimecode(
          framesOfSeconds(timeReferenceSamples / sampleRateHz, frameRate),
          frameRate,
        ),
      }),
    ...(trackNames && { trackNames }),
    ...(declaredLoudness && { declaredLoudness }),
  };
}
