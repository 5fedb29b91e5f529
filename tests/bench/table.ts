/** Results as text: columns whose numbers stand one under the other. */
import type { BrowserResult } from './browser.ts';
import type { GrowthResult } from './growth.ts';
import type { RatioResult } from './ratios.ts';

type Cell = string | number | null;

const said = (x: number | null, places: number): string => (x === null ? '–' : x.toFixed(places));
const signed = (x: number | null): string => said(x, 1).replace('-', '−');
const lengthOf = (minutes: number) =>
  minutes < 60
    ? `${minutes} min`
    : minutes % 60 === 0
      ? `${minutes / 60} h`
      : `${(minutes / 60).toFixed(1)} h`;

/** First column to the left, all others to the right. */
export function columns(title: string, heads: readonly string[], rows: readonly Cell[][]): string {
  const text = [heads.map(String), ...rows.map((row) => row.map((cell) => String(cell ?? '–')))];
  const widths = heads.map((_, i) => Math.max(...text.map((row) => row[i].length)));
  const line = (row: readonly string[]) =>
    row.map((cell, i) => (i === 0 ? cell.padEnd(widths[i]) : cell.padStart(widths[i]))).join('  ');
  return [title, line(text[0]), widths.map((w) => '─'.repeat(w)).join('  '), ...text.slice(1).map(line)].join(
    '\n',
  );
}

const above = (peak: number | null, idle: number | null) =>
  peak === null || idle === null ? null : Math.max(0, peak - idle);

/** What was asked of a row, and whether it came: by the exact ratio, not by the one shown. */
function askedOf({ isMp3, asked, ratio }: RatioResult): string {
  if (asked === null) return '';
  const isMet = isMp3 ? ratio <= asked : ratio >= asked;
  return `${isMp3 ? '≤' : '≥'} ${asked}×: ${isMet ? 'yes' : 'NO'}`;
}

/** Against `ebur128=peak=true`, or an MP3's bare decode. */
export const ratioTable = (rows: readonly RatioResult[], idle: number | null): string =>
  columns(
    'Whole process against whole process',
    [
      'file',
      'LUFS',
      'dBTP',
      'ours, s',
      'ffmpeg, s',
      'ratio',
      'asked',
      'ours, CPU s',
      'ffmpeg, CPU s',
      'read+convert, s',
      'ours by that',
      'ours, MB',
      'above idle',
      'ffmpeg, MB',
    ],
    rows.map((row) => [
      `${row.label}, ${lengthOf(row.seconds / 60)}`,
      signed(row.integratedLufs),
      signed(row.truePeakDbtp),
      said(row.oursSeconds, 2),
      said(row.ffmpegSeconds, 2),
      row.isMp3 ? `${said(row.ratio, 2)}× of decode` : `${said(row.ratio, 1)}×`,
      askedOf(row),
      said(row.oursCpuSeconds, 2),
      said(row.ffmpegCpuSeconds, 2),
      said(row.convertSeconds, 2),
      row.convertSeconds === null ? null : `${said(row.oursSeconds / row.convertSeconds, 1)}×`,
      said(row.oursMegabytes, 0),
      said(above(row.oursMegabytes, idle), 0),
      said(row.ffmpegMegabytes, 0),
    ]),
  );

/** Time and memory by length. */
export const growthTable = (rows: readonly GrowthResult[], idle: number | null): string =>
  columns(
    'Growth with length: stereo 48 kHz, broadcast level',
    ['length', 'GB', 'ours, s', '× real time', 'ours, MB', 'above idle', 'asked'],
    rows.map((row) => {
      const over = above(row.oursMegabytes, idle);
      return [
        lengthOf(row.minutes),
        said(row.gigabytes, 2),
        said(row.oursSeconds, 2),
        said((row.minutes * 60) / row.oursSeconds, 0),
        said(row.oursMegabytes, 0),
        said(over, 0),
        over === null ? '' : `< 150 MB: ${over < 150 ? 'yes' : 'NO'}`,
      ];
    }),
  );

/** Headless Chromium. */
export const browserTable = (rows: readonly BrowserResult[]): string =>
  columns(
    'In the browser: headless Chromium, the bench’s own worker, a file of the disk',
    ['files at once', 'length of each', 's', '× real time', 'asked'],
    rows.map((row) => [
      `${row.workers}, one worker each`,
      lengthOf(row.minutes),
      said(row.seconds, 2),
      said(row.timesRealTime, 0),
      row.asked === null ? '' : `≥ ${row.asked}: ${row.timesRealTime >= row.asked ? 'yes' : 'NO'}`,
    ]),
  );
