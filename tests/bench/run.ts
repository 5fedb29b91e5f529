// `npm run bench`: whole process against whole process, start-up included, on files made now; each row a ratio in one run.
import { execFileSync, spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

const seconds = 600;
const folder = mkdtempSync(join(tmpdir(), 'plimsoll-bench-'));
const noise = (audioChannels: number, rate: number) => {
  const parts = Array.from(
    { length: audioChannels },
    (_, c) => `anoisesrc=color=pink:seed=${c + 1}:duration=${seconds}:sample_rate=${rate}[n${c}]`,
  );
  const layout = audioChannels === 6 ? '5.1' : 'stereo';
  const inputs = Array.from({ length: audioChannels }, (_, c) => `[n${c}]`).join('');
  return `${parts.join(';')};${inputs}join=inputs=${audioChannels}:channel_layout=${layout},volume=-3dB`;
};
const make = (name: string, graph: string, ...codec: string[]) => {
  execFileSync('ffmpeg', ['-v', 'error', '-y', '-filter_complex', graph, ...codec, join(folder, name)]);
  return join(folder, name);
};
const time = (command: string, args: string[]) => {
  const began = performance.now();
  const { status } = spawnSync(command, args, { stdio: 'ignore' });
  if (status !== 0) throw new Error(`${command} ended with ${status}`);
  return (performance.now() - began) / 1000;
};

try {
  const files = [
    ['stereo, 48 kHz, 24 bit', make('stereo.wav', noise(2, 48_000), '-c:a', 'pcm_s24le')],
    ['5.1, 48 kHz, 24 bit', make('surround.wav', noise(6, 48_000), '-c:a', 'pcm_s24le')],
    ['stereo, 96 kHz, 24 bit', make('high.wav', noise(2, 96_000), '-c:a', 'pcm_s24le')],
    ['stereo MP3', make('stereo.mp3', noise(2, 48_000), '-b:a', '192k')],
  ];
  const rows = files.map(([name, file]) => {
    const ours = time(process.execPath, ['--import', 'tsx', 'workers/measure-files.ts', '--json', file]);
    const theirs = time('ffmpeg', ['-v', 'error', '-i', file, '-af', 'ebur128=peak=true', '-f', 'null', '-']);
    const round = (x: number) => Math.round(x * 100) / 100;
    return {
      file: `${name}, ${seconds / 60} min`,
      'measure, s': round(ours),
      'ffmpeg ebur128=peak=true, s': round(theirs),
      'ffmpeg / measure': round(theirs / ours),
    };
  });
  console.table(rows);
} finally {
  rmSync(folder, { recursive: true, force: true });
}
