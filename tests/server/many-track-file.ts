/** A 16 bit WAV of many audio channels at 48 kHz, written by hand; plain PCM, so it tells no layout. */

/** Peak of a 1 kHz sine in each audio channel, in dBFS; `from` and `to` say when it sounds, in seconds. */
export interface Track {
  dbfs: number;
  from?: number;
  to?: number;
}

export function manyTrackWave(tracks: readonly Track[], seconds: number): Uint8Array {
  const frames = seconds * 48_000;
  const blockAlign = tracks.length * 2;
  const file = Buffer.alloc(44 + frames * blockAlign);
  file.write('RIFF', 0);
  file.writeUInt32LE(36 + frames * blockAlign, 4);
  file.write('WAVEfmt ', 8);
  file.writeUInt32LE(16, 16);
  file.writeUInt16LE(1, 20);
  file.writeUInt16LE(tracks.length, 22);
  file.writeUInt32LE(48_000, 24);
  file.writeUInt32LE(48_000 * blockAlign, 28);
  file.writeUInt16LE(blockAlign, 32);
  file.writeUInt16LE(16, 34);
  file.write('data', 36);
  file.writeUInt32LE(frames * blockAlign, 40);
  tracks.forEach(({ dbfs, from = 0, to = seconds }, track) => {
    const peak = 32_768 * 10 ** (dbfs / 20);
    for (let frame = from * 48_000; frame < to * 48_000; frame++)
      file.writeInt16LE(
        Math.round(peak * Math.sin((2 * Math.PI * frame) / 48)),
        44 + frame * blockAlign + track * 2,
      );
  });
  return file;
}
