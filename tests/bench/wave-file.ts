/** Writes a recipe as a file of 24 bit: WAV, or RF64 where 32-bit sizes do not hold it. */
import { closeSync, openSync, statfsSync, writeSync } from 'node:fs';
import { dirname } from 'node:path';
import { itemsOf, type Recipe } from './material.ts';

const sampleBytes = 3;
const most32 = 0xffffffff;

export const audioChannelsOf = ({ layout }: Recipe): number => (layout === '5.1' ? 6 : 2);

/** Bytes of samples that the recipe makes. */
export const dataBytesOf = (recipe: Recipe): number =>
  Math.round(recipe.seconds * recipe.sampleRateHz) * audioChannelsOf(recipe) * sampleBytes;

function headOf(recipe: Recipe): Buffer {
  const audioChannels = audioChannelsOf(recipe);
  const dataBytes = dataBytesOf(recipe);
  const isExtensible = audioChannels > 2;
  const formatBytes = isExtensible ? 40 : 16;
  const isLong = dataBytes + 200 > most32;
  const head = Buffer.alloc(12 + (isLong ? 36 : 0) + 8 + formatBytes + 8);
  let at = 0;
  const id = (text: string) => (at += head.write(text, at, 'latin1'));
  const u16 = (x: number) => (at = head.writeUInt16LE(x, at));
  const u32 = (x: number) => (at = head.writeUInt32LE(x, at));
  const u64 = (x: number) => (at = head.writeBigUInt64LE(BigInt(x), at));
  const riffBytes = head.length - 8 + dataBytes;
  id(isLong ? 'RF64' : 'RIFF');
  u32(isLong ? most32 : riffBytes);
  id('WAVE');
  if (isLong) {
    // EBU Tech 3306: sizes of the whole, of the data chunk and of the fact chunk; no further sizes.
    id('ds64');
    u32(28);
    u64(riffBytes);
    u64(dataBytes);
    u64(dataBytes / sampleBytes / audioChannels);
    u32(0);
  }
  id('fmt ');
  u32(formatBytes);
  u16(isExtensible ? 0xfffe : 1);
  u16(audioChannels);
  u32(recipe.sampleRateHz);
  u32(recipe.sampleRateHz * audioChannels * sampleBytes);
  u16(audioChannels * sampleBytes);
  u16(8 * sampleBytes);
  if (isExtensible) {
    u16(22);
    u16(8 * sampleBytes);
    // L R C LFE and the side pair, which ffmpeg and the engine both take for surrounds.
    u32(0x60f);
    at += Buffer.from('0100000000001000800000aa00389b71', 'hex').copy(head, at);
  }
  id('data');
  u32(isLong ? most32 : dataBytes);
  return head;
}

function interleave(planar: readonly Float64Array[]): Buffer {
  const frames = planar[0].length;
  const frameBytes = sampleBytes * planar.length;
  const bytes = Buffer.allocUnsafe(frames * frameBytes);
  planar.forEach((samples, c) => {
    for (let i = 0, at = c * sampleBytes; i < frames; i++, at += frameBytes) {
      const code = Math.max(-8_388_608, Math.min(8_388_607, Math.round(samples[i] * 8_388_608)));
      bytes[at] = code;
      bytes[at + 1] = code >> 8;
      bytes[at + 2] = code >> 16;
    }
  });
  return bytes;
}

/** Throws a sentence where the disk has no room for `bytes` and a tenth more. */
export function checkRoom(folder: string, bytes: number): void {
  const { bavail, bsize } = statfsSync(folder);
  const [needed, free] = [bytes * 1.1, bavail * bsize];
  if (free >= needed) return;
  const gib = (x: number) => (x / 2 ** 30).toFixed(1);
  throw new Error(
    `The bench needs ${gib(needed)} GiB in ${folder} for its next file; ${gib(free)} GiB are free. Make room, set TMPDIR to another disk, or run with --quick.`,
  );
}

/** Writes the file, a minute in memory at a time. */
export function writeWave(path: string, recipe: Recipe): void {
  checkRoom(dirname(path), dataBytesOf(recipe));
  const file = openSync(path, 'w');
  try {
    writeSync(file, headOf(recipe));
    for (const planar of itemsOf(recipe)) {
      const bytes = interleave(planar);
      for (let done = 0; done < bytes.length;) done += writeSync(file, bytes, done);
    }
  } finally {
    closeSync(file);
  }
}
