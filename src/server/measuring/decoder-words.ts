/** What ffmpeg says when it fails, as sentences that a mix engineer can act on. Its own words go to the log only. */

const sentences: readonly [RegExp, string][] = [
  [
    /moov atom not found/i,
    'Its index is missing: the export or the copy was not finished. Export or copy it again.',
  ],
  [/encrypt|drm|decryption/i, 'It is encrypted. Deliver it without copy protection.'],
  [
    /Cannot allocate memory|Out of memory/i,
    'It asks for more memory than a sound file may. It may be damaged; export it again.',
  ],
  [
    /File size limit|CPU time limit/i,
    'Decoding it went beyond the limits. It may be damaged; export it again.',
  ],
  [
    /Decoder .* not found|Unknown codec|not implemented|unsupported/i,
    'Its codec, or a variant of it, is not known here. Deliver it as WAV, FLAC, MP3 or AAC.',
  ],
  [
    /Invalid data|Header missing|Error while decoding|corrupt|invalid|overread|missing|mismatch/i,
    'Parts of it are damaged. Export or copy it again.',
  ],
  [/End of file|Truncat|Premature|partial/i, 'It ends too early. Copy it again.'],
];

/** A sentence for what a decoder complained of; a general one where its words are not known. */
export const complaintSentence = (complaints: string): string =>
  sentences.find(([words]) => words.test(complaints))?.[1] ?? 'It may be damaged. Export it again.';
