/** What a browser is told an original is: by its name's ending, from this closed list, so that nothing is run as a page. */
const byEnding: Record<string, string> = {
  wav: 'audio/wav',
  wave: 'audio/wav',
  bwf: 'audio/wav',
  aif: 'audio/aiff',
  aiff: 'audio/aiff',
  aifc: 'audio/aiff',
  flac: 'audio/flac',
  mp3: 'audio/mpeg',
  m4a: 'audio/mp4',
  aac: 'audio/aac',
  ogg: 'audio/ogg',
  oga: 'audio/ogg',
  opus: 'audio/ogg',
  mp4: 'video/mp4',
  mov: 'video/quicktime',
  mxf: 'application/mxf',
};

/** The media type for a file name; 'application/octet-stream' for whatever is not in the list. */
export const contentTypeOf = (fileName: string): string =>
  byEnding[fileName.toLowerCase().split('.').at(-1) ?? ''] ?? 'application/octet-stream';
