/** What ffmpeg and ffprobe say when they fail, as sentences that a mix engineer can act on. Their own words go to the log only. */
import type { UnreadableCode } from '../../engine/source.ts';

interface Reason {
  words: RegExp;
  code: UnreadableCode;
  sentence: string;
}

/** Worst and surest first: the first that fits is told. */
const reasons: readonly Reason[] = [
  {
    words: /moov atom not found/i,
    code: 'header-broken',
    sentence: 'Its index is missing: the export or the copy was not finished. Export or copy it again.',
  },
  {
    words: /not on whitelist/i,
    code: 'not-audio',
    sentence:
      'It is a picture, a playlist, or another kind of file that is not taken for audio. Deliver the sound itself.',
  },
  {
    words: /encrypt|\bdrm\b|decryption/i,
    code: 'decoder-failed',
    sentence: 'It is encrypted. Deliver it without copy protection.',
  },
  {
    words: /Cannot allocate memory|Out of memory|max_alloc|failed to map segment/i,
    code: 'decoder-failed',
    sentence: 'It asks for more memory than a sound file may. It may be damaged; export it again.',
  },
  {
    words: /CPU time limit/i,
    code: 'decoder-too-slow',
    sentence: 'Decoding it took more time than a sound file may. It may be damaged; export it again.',
  },
  {
    words: /Decoder .*not found|Unknown codec|No decoder|not yet implemented|unsupported|patchwelcome/i,
    code: 'codec-unknown',
    sentence: 'Its codec, or a variant of it, is not known here. Deliver it as WAV, FLAC, MP3 or AAC.',
  },
  {
    words: /partial file|End of file|Truncat|Premature|exhausted/i,
    code: 'decoder-failed',
    sentence: 'It ends too early. Copy it again.',
  },
  {
    words: /Invalid|Header missing|Error while decoding|corrupt|overread|missing|mismatch|non monotonically/i,
    code: 'decoder-failed',
    sentence: 'Parts of it are damaged. Export or copy it again.',
  },
];

const general = { code: 'decoder-failed', sentence: 'It may be damaged. Export it again.' } as const;

/** Why it failed, by a decoder's complaints; a general reason where its words are not known. */
export const reasonOf = (complaints: string): { code: UnreadableCode; sentence: string } =>
  reasons.find(({ words }) => words.test(complaints)) ?? general;

/** The same of a file that could not even be recognised, where most complaints say only that. */
export function reasonOfProbe(complaints: string): { code: UnreadableCode; message: string } {
  const reason = reasons.slice(0, 5).find(({ words }) => words.test(complaints));
  return reason
    ? { code: reason.code, message: `The file cannot be read. ${reason.sentence}` }
    : {
        code: 'not-audio',
        message:
          'This is not an audio file, or it is damaged at its start: nothing in it could be recognised.',
      };
}
