/** Where a stretch of the passage is shown: the address of the page with the range that the chart reads. */
import type { Stretch } from '@/engine/figures.ts';

/** Seconds that are shown on either side of a place, so that it is seen in what surrounds it. */
const around = 5;

/** The page's search with another stretch; seconds count from the start of what was measured. */
export function passageAddress(search: string, { atSeconds, lengthSeconds }: Stretch): string {
  const params = new URLSearchParams(search);
  const range = [Math.max(0, atSeconds - around), atSeconds + lengthSeconds + around];
  params.set('t', range.map((seconds) => seconds.toFixed(2)).join('-'));
  return `?${params}`;
}
