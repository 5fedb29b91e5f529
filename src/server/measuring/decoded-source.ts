/** Samples that ffmpeg decodes in a child process, which dies with the measurement. */
import { execFile, spawn } from 'node:child_process';
import { once } from 'node:events';
import { closeSync, open as openCallback, readSync } from 'node:fs';
import { mkdtemp, open, readFile, rm, type FileHandle } from 'node:fs/promises';
import { join } from 'node:path';
import { setImmediate as breath } from 'node:timers/promises';
import { promisify } from 'node:util';
import type { Finding } from '../../engine/figures.ts';
import { layoutFindings } from '../../engine/containers/extent.ts';
import type { Encoding } from '../../engine/containers/samples.ts';
import { UnreadableError, type FrameWindow, type SampleSource } from '../../engine/source.ts';
import { log } from '../log.ts';
import { complaintSentence } from './decoder-words.ts';
import { jailed } from './jail.ts';
import type { Probe } from './probe.ts';
import { StallWatch } from './stall-watch.ts';

const run = promisify(execFile);
const openFd = promisify<string, string, number>(openCallback);

/** A decoder that gives nothing for so long hangs. */
const stallSeconds = 60;
/** No programme is longer: more comes from a file that makes its decoder run on. */
const mostSeconds = 24 * 3600;
/** What is looked at of the decoder's complaints. */
const mostComplaints = 16 * 1024;
const bufferBytes = 512 * 1024;
/** How long other work of this process may wait. */
const blockedMilliseconds = 40;

export class DecodedSource implements SampleSource {
  readonly format;
  readonly layout;
  readonly findings: Finding[];
  readonly secondsTotal: number | null;
  readonly encoding: Encoding;

  /** `folder`: private, for the pipe and the decoder's complaints. */
  constructor(
    private readonly path: string,
    private readonly probed: Probe,
    private readonly folder: string,
  ) {
    this.format = probed.format;
    this.layout = probed.layout;
    this.findings = layoutFindings(probed.layout);
    this.secondsTotal = probed.format.durationSeconds || null;
    // A 32-bit float holds 24-bit samples exactly; deeper ones need a double.
    const wide = (probed.format.bitDepth ?? 0) > 24;
    this.encoding = { kind: 'float', bytes: wide ? 8 : 4, littleEndian: true };
  }

  async *blocks(signal: AbortSignal, window: FrameWindow = { startFrame: 0, endFrame: null }) {
    const { format, encoding } = this;
    const frameBytes = encoding.bytes * format.channels;
    const room = await mkdtemp(join(this.folder, 'decoding-'));
    const complaintsFile = await open(join(room, 'complaints'), 'wx', 0o600);
    const pipe = await openPipe(join(room, 'samples'));
    const raw = encoding.bytes === 8 ? 'f64le' : 'f32le';
    const { command, args, env } = await jailed('ffmpeg', [
      ...[
        '-nostdin',
        '-threads',
        '1',
        '-i',
        this.path,
        '-map',
        `0:${this.probed.streamIndex}`,
        '-vn',
        '-sn',
        '-dn',
      ],
      // A write per packet would cost more than decoding it.
      ...['-c:a', `pcm_${raw}`, '-flush_packets', '0', '-f', raw, 'pipe:1'],
    ]);
    const child = spawn(command, args, {
      cwd: room,
      env,
      stdio: ['ignore', pipe.write.fd, complaintsFile.fd],
    });
    const ended = once(child, 'close').then(([code]) => code as number | null);
    // Awaited below; a spawn that failed is told by the pipe's end before that.
    ended.catch(() => {});
    await pipe.write.close();
    const watch = child.pid === undefined ? null : new StallWatch(child.pid, stallSeconds);
    let frames = 0;
    try {
      const buffer = new Uint8Array(Math.max(bufferBytes, 4 * frameBytes));
      let held = 0;
      let breathed = performance.now();
      for (;;) {
        // Blocks: a stream of Node costs more than decoding does. The pipe ends when ffmpeg does, however that is.
        const got = readSync(pipe.readFd, buffer, held, buffer.length - held, null);
        if (got === 0) break;
        watch?.touch();
        held += got;
        const count = Math.floor(held / frameBytes);
        if (count === 0) continue;
        const from = Math.max(0, Math.min(count, window.startFrame - frames));
        const to = Math.min(count, (window.endFrame ?? Infinity) - frames);
        frames += count;
        if (frames > mostSeconds * format.sampleRateHz)
          throw new UnreadableError(
            'decoder-failed',
            `The file gives more than ${mostSeconds / 3600} hours of audio. It may be damaged; export it again.`,
          );
        if (to > from)
          yield { bytes: buffer.subarray(from * frameBytes, to * frameBytes), frames: to - from };
        buffer.copyWithin(0, count * frameBytes, held);
        held -= count * frameBytes;
        if (performance.now() - breathed > blockedMilliseconds) {
          await breath();
          signal.throwIfAborted();
          breathed = performance.now();
        }
      }
      const code = await ended;
      signal.throwIfAborted();
      if (watch?.stalled)
        throw new UnreadableError(
          'decoder-too-slow',
          `Decoding stood still for ${stallSeconds} s and was ended. The file may be damaged; export it again.`,
        );
      const complaints = await readFile(join(room, 'complaints'), 'utf8');
      this.#judgeEnd(code, frames, complaints.slice(0, mostComplaints));
    } finally {
      child.kill('SIGKILL');
      closeSync(pipe.readFd);
      await Promise.all([watch?.end(), complaintsFile.close()]);
      await rm(room, { recursive: true, force: true });
    }
  }

  #judgeEnd(code: number | null, frames: number, complaints: string): void {
    const failed = code !== 0 || complaints.trim() !== '';
    const seconds = frames / this.format.sampleRateHz;
    if (failed) log.info({ code, complaints: complaints.slice(0, 1000) }, 'ffmpeg complained');
    if (frames === 0)
      throw new UnreadableError(
        'decoder-failed',
        `The ${this.format.codec} audio in this file could not be decoded. ${complaintSentence(complaints)}`,
      );
    if (failed)
      this.findings.push({
        code: 'unreadable-part',
        message: `Part of the file could not be decoded; ${seconds.toFixed(3)} s were measured. ${complaintSentence(complaints)}`,
        ...(code !== 0 && { atSeconds: seconds }),
      });
    const told = this.probed.toldSeconds;
    if (told !== null && seconds < told - Math.max(0.5, told * 0.01))
      this.findings.push({
        code: 'truncated',
        message: `The file is cut short: it tells of ${told.toFixed(3)} s of audio, ${seconds.toFixed(3)} s are there.`,
        atSeconds: seconds,
      });
  }
}

/** Both ends of a pipe with a name: opened at once, since either alone waits for the other. */
async function openPipe(path: string): Promise<{ readFd: number; write: FileHandle }> {
  await run('mkfifo', ['-m', '600', path]);
  const [read, write] = await Promise.all([openFd(path, 'r'), open(path, 'w')]);
  return { readFd: read, write };
}
