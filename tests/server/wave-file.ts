/** A plain WAV of a 1 kHz sine, written by hand: 16 bit, stereo, 48 kHz, -20 dBFS. */
export function sineWave(seconds: number, sampleRateHz = 48_000): Uint8Array {
  const frames = Math.round(seconds * sampleRateHz);
  const dataBytes = frames * 4;
  const file = Buffer.alloc(44 + dataBytes);
  file.write('RIFF', 0);
  file.writeUInt32LE(36 + dataBytes, 4);
  file.write('WAVEfmt ', 8);
  file.writeUInt32LE(16, 16);
  file.writeUInt16LE(1, 20);
  file.writeUInt16LE(2, 22);
  file.writeUInt32LE(sampleRateHz, 24);
  file.writeUInt32LE(sampleRateHz * 4, 28);
  file.writeUInt16LE(4, 32);
  file.writeUInt16LE(16, 34);
  file.write('data', 36);
  file.writeUInt32LE(dataBytes, 40);
  // 48 samples are one period at 48 kHz: the table repeats exactly.
  const period = Math.round(sampleRateHz / 1000);
  const table = Array.from({ length: period }, (_, i) =>
    Math.round(3276.8 * Math.sin((2 * Math.PI * i) / period)),
  );
  for (let frame = 0; frame < frames; frame++) {
    const sample = table[frame % period];
    file.writeInt16LE(sample, 44 + frame * 4);
    file.writeInt16LE(sample, 46 + frame * 4);
  }
  return file;
}
