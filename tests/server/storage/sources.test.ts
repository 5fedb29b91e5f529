import { createHash, randomBytes } from 'node:crypto';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { HashingSource } from '../../../src/server/storage/hashing-source.ts';
import { PiecewiseSource } from '../../../src/server/storage/piecewise-source.ts';

const mebibyte = 1024 ** 2;
const bytes = randomBytes(10 * mebibyte + 12_345);
const source = () => new PiecewiseSource(bytes.length, async (start, end) => bytes.subarray(start, end));
const reads = fc.array(
  fc.tuple(fc.integer({ min: 0, max: bytes.length + 10 }), fc.integer({ min: 0, max: 5 * mebibyte })),
  { minLength: 1, maxLength: 12 },
);

describe('reading an object in pieces', () => {
  it('gives the same bytes as the object, wherever and however much is read', async () => {
    await fc.assert(
      fc.asyncProperty(reads, async (asked) => {
        const pieces = source();
        for (const [offset, length] of asked) {
          const wanted = bytes.subarray(offset, offset + length);
          expect(Buffer.compare(await pieces.read(offset, length), wanted)).toBe(0);
        }
      }),
      { numRuns: 30 },
    );
  });

  it('asks for each piece once when read from front to back', async () => {
    const asked: number[] = [];
    const pieces = new PiecewiseSource(bytes.length, async (start, end) => {
      asked.push(start);
      return bytes.subarray(start, end);
    });
    for (let at = 0; at < bytes.length; at += 100_000) await pieces.read(at, 100_000);
    expect(asked).toEqual([0, 4 * mebibyte, 8 * mebibyte]);
  });

  it('asks again for a piece that failed', async () => {
    let failures = 1;
    const pieces = new PiecewiseSource(bytes.length, async (start, end) => {
      if (failures-- > 0) throw new Error('away');
      return bytes.subarray(start, end);
    });
    await expect(pieces.read(0, 10)).rejects.toThrow('away');
    expect(Buffer.compare(await pieces.read(0, 10), bytes.subarray(0, 10))).toBe(0);
  });
});

describe('an object that is shorter than it was said to be', () => {
  it('ends the reading, and does not hang it', async () => {
    const pieces = new PiecewiseSource(100, async () => new Uint8Array(60));
    await expect(pieces.read(0, 100)).rejects.toThrow('60 bytes came where 100 were asked for');
  });
});

describe('hashing while somebody reads', () => {
  it('ends in the digest of the whole object, in whatever order it was read', async () => {
    const whole = createHash('sha256').update(bytes).digest('hex');
    await fc.assert(
      fc.asyncProperty(reads, async (asked) => {
        const hashing = new HashingSource(source());
        for (const [offset, length] of asked) await hashing.read(offset, length);
        expect(await hashing.sha256()).toBe(whole);
      }),
      { numRuns: 20 },
    );
  });

  it('reads nothing twice for a reader that goes from front to back', async () => {
    let taken = 0;
    const inner = source();
    const hashing = new HashingSource({
      size: inner.size,
      read: async (offset, length) => {
        const got = await inner.read(offset, length);
        taken += got.length;
        return got;
      },
    });
    for (let at = 0; at < bytes.length; at += 100_000) await hashing.read(at, 100_000);
    await hashing.sha256();
    expect(taken).toBe(bytes.length);
  });
});
