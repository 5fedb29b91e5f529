/** A measuring plan in words. */
import type { MeasuringPlan, Presentation } from '../engine/plan.ts';
import { formatTimecode } from './figures-text.ts';

/** 'Full mix (L R C LFE Ls Rs)'. */
const presentationWords = ({ name, speakers }: Pick<Presentation, 'name' | 'speakers'>): string =>
  `${name} (${speakers.join(' ')})`;

/**
 * After 'measured': 'whole', or 'from 00:01:30.000 to the end, as 2 presentations: Full mix (L R), M&E (L R)'. Times are
 * written by `timeOf`, from the seconds of the file.
 */
export function planWords(
  { stream, window, presentations }: MeasuringPlan,
  timeOf: (seconds: number) => string = formatTimecode,
): string {
  const parts = [
    stream > 0 && `from audio stream ${stream + 1}`,
    window &&
      `from ${timeOf(window.startSeconds)} to ${window.endSeconds === null ? 'the end' : timeOf(window.endSeconds)}`,
    presentations?.length === 1 && `as ${presentationWords(presentations[0])}`,
    presentations &&
      presentations.length > 1 &&
      `as ${presentations.length} presentations: ${presentations.map(presentationWords).join(', ')}`,
  ].filter((part): part is string => Boolean(part));
  return parts.length === 0 ? 'whole' : parts.join(', ');
}
