/** Figures to take along: whole, as the engine gave them, in the words of `npm run measure -- --json`. */
import { engineVersion } from '@/engine/figures.ts';
import type { BenchResult } from './crew.ts';

export const figuresJson = (fileName: string, { measured, preview }: BenchResult): string => {
  const { format, figures, findings } = measured.measurement;
  const { loudness, truePeak, samplePeak, times, measuredSeconds } = figures;
  return JSON.stringify(
    {
      file: fileName,
      engineVersion,
      preview,
      format,
      loudness,
      truePeak,
      samplePeak,
      times,
      measuredSeconds,
      findings,
    },
    null,
    1,
  );
};

/** Hands the figures to the browser as a file; nothing is asked of a server. */
export function saveFigures(fileName: string, result: BenchResult): void {
  const url = URL.createObjectURL(new Blob([figuresJson(fileName, result)], { type: 'application/json' }));
  const link = document.createElement('a');
  link.href = url;
  link.download = `${fileName}.figures.json`;
  link.click();
  // The browser has taken it by the next task.
  setTimeout(() => URL.revokeObjectURL(url), 0);
}
