import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { maximumFileBytes } from '../../src/domain/api/deliverables.ts';
import { partSize, planUpload, whyNotUploadable } from '../../src/domain/upload-plan.ts';

describe('planning an upload', () => {
  // "Amazon S3 multipart upload limits": parts 5 MiB to 5 GiB, 1 to 10,000 of them, the last of any size.
  it('keeps within what S3 takes for any size up to 64 GiB, and the parts add up', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: maximumFileBytes }), (byteSize) => {
        const plan = planUpload(byteSize);
        const last = partSize(byteSize, plan, plan.partCount);
        expect(plan.partCount).toBeLessThanOrEqual(10_000);
        expect(plan.partBytes).toBeGreaterThanOrEqual(8 * 1024 ** 2);
        expect(plan.partBytes).toBeLessThanOrEqual(5 * 1024 ** 3);
        expect(last).toBeGreaterThan(0);
        expect(last).toBeLessThanOrEqual(plan.partBytes);
        expect((plan.partCount - 1) * plan.partBytes + last).toBe(byteSize);
      }),
    );
  });

  it('has no plan for an empty file or one beyond 64 GiB', () => {
    expect(() => planUpload(0)).toThrow(RangeError);
    expect(() => planUpload(maximumFileBytes + 1)).toThrow(RangeError);
    expect(planUpload(maximumFileBytes).partCount).toBeLessThanOrEqual(10_000);
  });
});

describe('files that are not taken', () => {
  it.each([
    ['tallow.wav', 0, /empty/],
    ['tallow.wav', maximumFileBytes + 1, /64 GiB/],
    ['  ', 10, /no name/],
    ['../tallow.wav', 10, /slash/],
    ['a\u0000b.wav', 10, /control/],
    ['tallow\u202evaw.exe', 10, /control/],
    ['.DS_Store', 10, /dot/],
    ['x'.repeat(256), 10, /256 characters/],
  ])('says why for %j', (name, size, sentence) => {
    expect(whyNotUploadable(name, size)).toMatch(sentence);
  });

  it('takes names of other scripts and many dots', () => {
    expect(whyNotUploadable('Талый путь 1.04 — v2.final.wav', 10)).toBeNull();
  });
});
