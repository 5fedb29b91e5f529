/** The signals of reference-audio/, measured as a person would: by the command. */
import { execFileSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';

const folder = fileURLToPath(new URL('../../reference-audio/', import.meta.url));
const root = fileURLToPath(new URL('../../', import.meta.url));

const figures = z.object({
  integratedLufs: z.number().nullish(),
  momentaryMaxLufs: z.number().nullish(),
});
const peak = z.object({ maxDbtp: z.number().nullish() });
const manifest = z
  .array(
    z.object({
      file: z.string(),
      sha256: z.string(),
      source: z.string().min(1),
      form: z.string(),
      expected: figures.extend(peak.shape),
      tolerance: z.object({ plus: z.number(), minus: z.number() }),
    }),
  )
  .min(6)
  .parse(JSON.parse(readFileSync(`${folder}manifest.json`, 'utf8')));
const answer = z.array(
  z.object({ loudness: figures, truePeak: peak, error: z.null(), findings: z.array(z.unknown()) }),
);

describe('reference audio', () => {
  let read: z.infer<typeof answer> = [];
  beforeAll(() => {
    const files = manifest.map(({ file }) => folder + file);
    const args = ['--import', 'tsx', 'workers/measure-files.ts', ...files, '--json'];
    const printed = execFileSync(process.execPath, args, { cwd: root, encoding: 'utf8' });
    read = answer.parse(JSON.parse(printed));
  });

  it.each(manifest.map((entry, i) => [entry.file, i, entry] as const))(
    '%s is the file that the manifest names, and reads as its source says',
    (file, i, { sha256, expected, tolerance }) => {
      expect(
        createHash('sha256')
          .update(readFileSync(folder + file))
          .digest('hex'),
      ).toBe(sha256);
      const got = { ...read[i].loudness, ...read[i].truePeak };
      const names = Object.keys(expected) as (keyof typeof expected)[];
      expect(names.length).toBeGreaterThan(0);
      for (const name of names) {
        const off = (got[name] ?? NaN) - (expected[name] ?? NaN);
        expect(off, name).toBeLessThanOrEqual(tolerance.plus);
        expect(off, name).toBeGreaterThanOrEqual(-tolerance.minus);
      }
    },
  );
});
