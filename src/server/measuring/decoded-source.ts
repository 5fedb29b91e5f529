/** Samples that ffmpeg decodes in a child process, which dies with the measurement. */
import { spawn } from 'node:child_process';
import type { Finding } from '../../engine/figures.ts';
import { layoutFindings } from '../../engine/containers/extent.ts';
import type { Encoding } from '../../engine/containers/samples.ts';
import { UnreadableError, type FrameWindow, type SampleSource } from '../../engine/source.ts';
import { log } from '../log.ts';
import type { Hints } from './container-hints.ts';
import { reasonOf } from './decoder-words.ts';
import { jailed, throwIfNotLaunched, type Limits } from './jail.ts';
import type { Probe } from './probe.ts';
import { SamplePipe } from './sample-pipe.ts';

/** A decoder that gives nothing for so long hangs. */
const stallSeconds = 60;
/** No programme is longer: more comes from a file that makes its decoder run on. */
const mostSeconds = 48 * 3600;
/** What is looked at of the decoder's complaints. */
const mostComplaints = 16 * 1024;
/** ffmpeg's status when a signal ended it in good order; the only one that comes is that of its processor time. */
const endedBySignal = 255;

/** What is asked of ffmpeg for each form that its decoders give samples in: the same values, nothing rounded. */
const rawOf: Record<string, { raw: string; encoding: Encoding }> = {
  u8: { raw: 'u8', encoding: { kind: 'unsigned', bytes: 1, littleEndian: true } },
  s16: { raw: 's16le', encoding: { kind: 'integer', bytes: 2, littleEndian: true } },
  s24: { raw: 's24le', encoding: { kind: 'integer', bytes: 3, littleEndian: true } },
  s32: { raw: 's32le', encoding: { kind: 'integer', bytes: 4, littleEndian: true } },
  flt: { raw: 'f32le', encoding: { kind: 'float', bytes: 4, littleEndian: true } },
  dbl: { raw: 'f64le', encoding: { kind: 'float', bytes: 8, littleEndian: true } },
};

export interface DecodeTerms {
  /** Private; the decoder's own folder too. */
  folder: string;
  /** The file lies in it. */
  staged: boolean;
  limits?: Limits & { stallSeconds?: number; mostSeconds?: number };
}

/** How a decoder ended, and what it said. */
interface End {
  code: number | null;
  killedBy: NodeJS.Signals | null;
  complaints: string;
}

export class DecodedSource implements SampleSource {
  readonly format;
  readonly layout;
  readonly findings: Finding[];
  readonly secondsTotal: number | null;
  readonly encoding: Encoding;
  readonly #raw: string;

  constructor(
    private readonly path: string,
    private readonly probed: Probe,
    private readonly hints: Hints,
    private readonly terms: DecodeTerms,
  ) {
    const { format, layout, sampleFormat } = probed;
    this.layout = layout;
    this.findings = layoutFindings(layout);
    // The encoder's count is surer than a length reckoned from the bit rate.
    const seconds = hints.countedSeconds ?? format.durationSeconds;
    this.format = { ...format, durationSeconds: seconds };
    this.secondsTotal = seconds || null;
    // Decoders give 24 bits, and fewer, at the top of 32: what is below them is empty.
    const isWithin24 = sampleFormat === 's32' && (format.bitDepth ?? 32) <= 24;
    const { raw, encoding } = rawOf[isWithin24 ? 's24' : sampleFormat] ?? rawOf.dbl;
    this.#raw = raw;
    this.encoding = encoding;
  }

  /** Frames of the window as they come. Reads on to the file's end in any case, so that what is missing there is told. */
  async *blocks(signal: AbortSignal, window: FrameWindow = { startFrame: 0, endFrame: null }) {
    const { format, encoding, terms } = this;
    const most = terms.limits?.mostSeconds ?? mostSeconds;
    const patience = terms.limits?.stallSeconds ?? stallSeconds;
    const frameBytes = encoding.bytes * format.channels;
    const { child, pipe, ended } = await this.#start(frameBytes);
    const kill = () => child.kill('SIGKILL');
    signal.addEventListener('abort', kill, { once: true });
    if (signal.aborted) kill();
    const watch = watchOver(() => pipe.heard, patience, kill);
    let frames = 0;
    try {
      for (let bytes = await pipe.next(); bytes; bytes = await pipe.next()) {
        signal.throwIfAborted();
        const count = Math.floor(bytes.length / frameBytes);
        const from = Math.max(0, Math.min(count, window.startFrame - frames));
        const to = Math.min(count, (window.endFrame ?? Infinity) - frames);
        frames += count;
        if (frames > most * format.sampleRateHz)
          throw new UnreadableError(
            'decoder-failed',
            `The file gives more than ${most / 3600} hours of audio. It may be damaged; export it again.`,
          );
        if (to > from) yield { bytes: bytes.subarray(from * frameBytes, to * frameBytes), frames: to - from };
      }
      const end = await ended;
      signal.throwIfAborted();
      if (watch.stalled)
        throw new UnreadableError(
          'decoder-too-slow',
          `Decoding stood still for ${patience} s and was ended. The file may be damaged; export it again.`,
        );
      this.#judgeEnd(end, frames);
    } finally {
      signal.removeEventListener('abort', kill);
      watch.end();
      kill();
      await pipe.close();
    }
  }

  async #start(frameBytes: number) {
    const { probed, path, terms } = this;
    const [first, ...others] = probed.streamIndexes;
    const chosen =
      others.length === 0
        ? ['-map', `0:${first}`]
        : [
            '-filter_complex',
            `${probed.streamIndexes.map((index) => `[0:${index}]`).join('')}amerge=inputs=${others.length + 1}[joined]`,
            ...['-map', '[joined]'],
          ];
    const { command, args, env } = await jailed(
      'ffmpeg',
      [
        ...['-nostdin', '-threads', '1', '-i', `file:${path}`, ...chosen, '-vn', '-sn', '-dn'],
        // A write per packet would cost more than decoding it.
        ...['-c:a', `pcm_${this.#raw}`, '-flush_packets', '0', '-f', this.#raw, 'pipe:1'],
      ],
      terms,
    );
    const pipe = await SamplePipe.open(terms.folder, frameBytes);
    const child = spawn(command, args, {
      cwd: terms.folder,
      env,
      stdio: ['ignore', pipe.writeFd, 'pipe'],
    });
    pipe.closeWriter();
    let complaints = '';
    child.stderr?.setEncoding('utf8').on('data', (text: string) => {
      if (complaints.length < mostComplaints) complaints += text;
    });
    const ended = new Promise<End>((resolve, reject) => {
      child.once('error', reject);
      child.once('close', (code, killedBy) => resolve({ code, killedBy, complaints }));
    });
    // Awaited once the pipe has ended, which a failed spawn brings about at once.
    ended.catch(() => {});
    return { child, pipe, ended };
  }

  #judgeEnd({ code, killedBy, complaints }: End, frames: number): void {
    throwIfNotLaunched('ffmpeg', code, complaints);
    // Nobody here sent it: a machine without memory does.
    if (killedBy === 'SIGKILL')
      throw Object.assign(new Error('The system killed the decoder'), {
        code: 'EKILLED',
        syscall: 'ffmpeg',
      });
    const failed = code !== 0 || complaints.trim() !== '';
    const seconds = frames / this.format.sampleRateHz;
    if (failed)
      log.info({ code, killedBy, complaints: complaints.slice(0, 1000) }, 'ffmpeg complained of a file');
    const ranOut = code === endedBySignal || killedBy === 'SIGXCPU';
    const said = this.hints.isLocked ? 'encrypted' : ranOut ? 'CPU time limit' : complaints;
    const { code: reason, sentence } = reasonOf(said);
    // What is locked decodes to noise at best, and where time ran out the rest may be sound.
    if (frames === 0 || ranOut || (this.hints.isLocked && failed))
      throw new UnreadableError(
        reason,
        `The ${this.format.codec} audio in this file could not be decoded. ${sentence}`,
      );
    if (failed)
      this.findings.push({
        code: 'unreadable-part',
        message: `Part of the file could not be decoded; ${seconds.toFixed(3)} s were. ${sentence}`,
        ...(code !== 0 && { atSeconds: seconds }),
      });
    this.#judgeLength(seconds);
  }

  #judgeLength(seconds: number): void {
    const { countedSeconds, lacksEnd } = this.hints;
    const told = countedSeconds ?? this.probed.toldSeconds;
    const tolerance = countedSeconds === null ? this.probed.toldToleranceSeconds : 0.15;
    if (told !== null && seconds < told - tolerance)
      this.findings.push({
        code: 'truncated',
        message: `The file is cut short: it tells of ${told.toFixed(3)} s of audio, ${seconds.toFixed(3)} s are there.`,
        atSeconds: seconds,
      });
    else if (lacksEnd)
      this.findings.push({
        code: 'truncated',
        message: `The file is cut short: the mark of its end is missing after ${seconds.toFixed(3)} s of audio.`,
        atSeconds: seconds,
      });
    else if (told !== null && seconds > told + tolerance)
      this.findings.push({
        code: 'size-lies',
        message: `The file tells of ${told.toFixed(3)} s of audio, but holds ${seconds.toFixed(3)} s; all of it was decoded.`,
      });
  }
}

/** Calls `kill` once `heard` has not changed for so many seconds. */
function watchOver(heard: () => number, seconds: number, kill: () => void) {
  let [last, since] = [heard(), performance.now()];
  const watch = { stalled: false, end: () => clearInterval(timer) };
  const timer = setInterval(
    () => {
      const now = heard();
      if (now !== last) [last, since] = [now, performance.now()];
      else if (performance.now() - since > seconds * 1000) {
        watch.stalled = true;
        kill();
      }
    },
    Math.min(1000, seconds * 250),
  );
  return watch;
}
