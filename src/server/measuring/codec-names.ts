/** Containers and codecs by the names that the trade writes. */

const codecs: Record<string, string> = {
  flac: 'FLAC',
  mp3: 'MP3',
  mp2: 'MPEG-1 Layer II',
  aac: 'AAC',
  alac: 'ALAC',
  vorbis: 'Vorbis',
  opus: 'Opus',
  ac3: 'AC-3',
  eac3: 'E-AC-3',
  wavpack: 'WavPack',
  dts: 'DTS',
  pcm_alaw: 'A-law',
  pcm_mulaw: 'µ-law',
};

export const codecName = (name: string): string =>
  codecs[name] ??
  (name.startsWith('pcm_f')
    ? 'PCM float'
    : name.startsWith('pcm_')
      ? 'PCM'
      : name.startsWith('adpcm_')
        ? 'ADPCM'
        : name);

/** Codecs that keep whole samples; of the others a number of bits would say nothing. */
export const isLossless = (name: string): boolean =>
  (name.startsWith('pcm_') && !name.endsWith('law')) ||
  ['flac', 'alac', 'wavpack', 'tta', 'ape', 'tak'].includes(name);

/** Declared bits per sample; `null` where the codec has none. */
export const codedBits = (stream: {
  codec_name?: string;
  bits_per_raw_sample?: number;
  bits_per_sample?: number;
}): number | null =>
  isLossless(stream.codec_name ?? '') ? stream.bits_per_raw_sample || stream.bits_per_sample || null : null;

/** `name`: ffmpeg's names of the demuxer, with commas; `brand`: the major brand of an MP4. */
export function containerName(name: string, brand: string): string {
  if (name.includes('mp4')) return brand.startsWith('qt') ? 'MOV' : 'MP4';
  const first = name.split(',')[0];
  return first === 'matroska' ? 'Matroska' : first.toUpperCase();
}
