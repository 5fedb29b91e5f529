// `npm run measure -- FILE... [--json]`: the worker's own engine from the command line.
import { UnreadableError, measureFile } from '../src/server/measuring/measure-source.ts';
import type { Measurement } from '../src/engine/figures.ts';

// Figures go to standard output, and nothing else does.
process.env.LOG_LEVEL ??= 'silent';

interface Line {
  file: string;
  measurement: Measurement | null;
  error: { code: string; message: string } | null;
}

async function measureOne(file: string): Promise<Line> {
  try {
    const [{ measurement }] = await measureFile(file);
    return { file, measurement, error: null };
  } catch (error) {
    if (error instanceof UnreadableError)
      return { file, measurement: null, error: { code: error.code, message: error.message } };
    if (error instanceof Error && 'syscall' in error && 'code' in error)
      return { file, measurement: null, error: { code: String(error.code), message: systemSentence(error) } };
    throw error;
  }
}

function systemSentence(error: Error & { code?: unknown }): string {
  if (error.message.includes('spawn ff')) return 'This file needs ffmpeg, which is not installed.';
  if (error.code === 'ENOENT') return 'There is no such file.';
  if (error.code === 'EISDIR') return 'This is a folder.';
  if (error.code === 'EACCES') return 'This file may not be read.';
  return error.message;
}

function toJson({ file, measurement, error }: Line) {
  if (!measurement)
    return { file, format: null, loudness: null, truePeak: null, samplePeak: null, findings: [], error };
  const { format, figures, findings } = measurement;
  const { container, codec, sampleRateHz, bitDepth, channels, layout, durationSeconds } = format;
  return {
    file,
    format: { container, codec, sampleRateHz, bitDepth, channels, layout, durationSeconds },
    loudness: figures.loudness,
    truePeak: figures.truePeak,
    samplePeak: figures.samplePeak,
    findings,
    error,
  };
}

const figure = (value: number | null | undefined, unit: string) =>
  value === null || value === undefined ? 'no value' : `${value.toFixed(1).replace('-', '\u2212')} ${unit}`;

function toText({ file, measurement, error }: Line): string {
  if (!measurement) return `${file}\n  unreadable: ${error?.message}\n`;
  const { format: f, figures, findings } = measurement;
  const { loudness: l } = figures;
  const rows: [string, string][] = [
    ['Integrated loudness', figure(l.integratedLufs, 'LUFS')],
    ...('dualMonoIntegratedLufs' in l
      ? [['  as dual mono', figure(l.dualMonoIntegratedLufs, 'LUFS')] as [string, string]]
      : []),
    ['Loudness range', figure(l.rangeLu, 'LU') + (figures.measuredSeconds < 60 ? ', short for a range' : '')],
    ['Maximum short-term', figure(l.shortTermMaxLufs, 'LUFS')],
    ['Maximum momentary', figure(l.momentaryMaxLufs, 'LUFS')],
    ['Maximum true peak', figure(figures.truePeak.maxDbtp, 'dBTP')],
    ['Maximum sample peak', figure(figures.samplePeak.maxDbfs, 'dBFS')],
  ];
  const head = `${f.container} ${f.codec}, ${f.sampleRateHz / 1000} kHz${f.bitDepth ? `, ${f.bitDepth} bit` : ''}, ${f.layout}, ${f.durationSeconds.toFixed(3)} s`;
  return [
    file,
    `  ${head}`,
    ...rows.map(([name, value]) => `  ${name.padEnd(22)}${value}`),
    ...findings.map((x) => `  ${x.message}`),
    '',
  ].join('\n');
}

const args = process.argv.slice(2);
const asJson = args.includes('--json');
const files = args.filter((arg) => arg !== '--json');
if (files.length === 0) {
  console.error('Name one file or more: npm run measure -- FILE... [--json]');
  process.exit(2);
}
const lines: Line[] = [];
for (const file of files) {
  const line = await measureOne(file);
  lines.push(line);
  if (!asJson) console.log(toText(line));
}
if (asJson) console.log(JSON.stringify(lines.map(toJson), null, 1));
process.exitCode = lines.some((line) => line.error) ? 1 : 0;
