/** Several mono files that are one programme: found by their names, joined frame by frame in constant memory. */
import type { AudioFormat, Finding } from '../figures.ts';
import { fromSpeakers, speakers as allSpeakers, type Speaker } from '../layouts.ts';
import { speakerOfName } from '../presentations.ts';
import { UnreadableError, type FrameWindow, type SampleSource } from '../source.ts';
import { sampleReader, type Encoding } from './samples.ts';

export interface MonoSet<T> {
  /** What the names have in common. */
  name: string;
  /** In the layout's usual order. */
  parts: { file: T; speaker: Speaker }[];
}

/** As the layouts have them: rears before sides, then the heights, then what stands in none. */
const inOrder: readonly Speaker[] = [
  ...(['L', 'R', 'C', 'LFE', 'Ls', 'Rs', 'Lrs', 'Rrs', 'Lss', 'Rss', 'Ltf', 'Rtf', 'Ltr', 'Rtr'] as const),
];
const usualOrder = [...inOrder, ...allSpeakers.filter((speaker) => !inOrder.includes(speaker))];

/** Groups files whose names differ by a loudspeaker at their end ('Reel 1.Ls.wav'); what makes no set of two is left out. */
export function findMonoSets<T extends { name: string }>(files: readonly T[]): MonoSet<T>[] {
  const sets = new Map<string, MonoSet<T>>();
  for (const file of files) {
    const dot = file.name.lastIndexOf('.');
    const stem = dot > 0 ? file.name.slice(0, dot) : file.name;
    const speaker = speakerOfName(stem);
    const cut = stem.search(/[\s._-]+[^\s._-]+$/);
    if (!speaker || cut <= 0) continue;
    const name = stem.slice(0, cut);
    const key = `${name.toLowerCase()}\u0000${file.name.slice(stem.length).toLowerCase()}`;
    const set = sets.get(key) ?? { name, parts: [] };
    set.parts.push({ file, speaker });
    sets.set(key, set);
  }
  // Two files for one loudspeaker make no set that anybody could have meant.
  return [...sets.values()]
    .filter(({ parts }) => parts.length > 1 && new Set(parts.map((p) => p.speaker)).size === parts.length)
    .map(({ name, parts }) => ({
      name,
      parts: parts.sort((a, b) => usualOrder.indexOf(a.speaker) - usualOrder.indexOf(b.speaker)),
    }));
}

const float64: Encoding = { kind: 'float', bytes: 8, littleEndian: true };

/**
 * The parts as one source, in the order given: in their own encoding where they share it, so that full scale and unused bits
 * stay what they are, else as float64. A shorter part is followed by silence, which is told.
 * Throws UnreadableError where the parts do not go together.
 */
export function joinMono(sources: readonly SampleSource[], speakers: readonly Speaker[]): SampleSource {
  const rates = [...new Set(sources.map((s) => s.format.sampleRateHz))];
  if (rates.length > 1)
    throw new UnreadableError(
      'header-broken',
      `The files of this set have different sample rates (${rates.join(', ')} Hz). Export them alike.`,
    );
  if (sources.some((s) => s.format.channels !== 1))
    throw new UnreadableError(
      'header-broken',
      'A file of this set is not mono. Leave it out, or deliver one file.',
    );
  const seconds = sources.map((s) => s.secondsTotal);
  const known = seconds.filter((s) => s !== null);
  const secondsTotal = known.length === sources.length ? Math.max(...known) : null;
  const layout = fromSpeakers(speakers);
  const { encoding } = sources[0];
  const alike = sources.every((s) => isSame(s.encoding, encoding));
  const depths = sources.map((s) => s.format.bitDepth);
  const uneven: Finding[] =
    secondsTotal !== null && known.some((s) => secondsTotal - s > 0.0005)
      ? [
          {
            code: 'truncated',
            message: `The files of this set differ in length, by ${(secondsTotal - Math.min(...known)).toFixed(3)} s at the most; the shorter ones were followed by silence.`,
          },
        ]
      : [];
  return {
    format: {
      ...factsOfAll(sources.map((s) => s.format)),
      bitDepth: depths.includes(null) ? null : Math.max(...depths.map(Number)),
      channels: sources.length,
      layout: layout.name,
      durationSeconds: secondsTotal ?? 0,
    },
    layout,
    get findings() {
      return [
        ...uneven,
        ...sources.flatMap((s) => s.findings.filter(({ code }) => code !== 'layout-assumed')),
      ];
    },
    secondsTotal,
    encoding: alike ? encoding : float64,
    blocks: (signal, window) => joined(sources, alike ? encoding : float64, signal, window),
  };
}

const isSame = (a: Encoding, b: Encoding) =>
  a.kind === b.kind && a.bytes === b.bytes && a.littleEndian === b.littleEndian;

/** The first part's format without what is said of that part alone: its loudness, its tracks, and a start that others contradict. */
function factsOfAll(formats: readonly AudioFormat[]): AudioFormat {
  const format = { ...formats[0] };
  delete format.declaredLoudness;
  delete format.trackNames;
  if (new Set(formats.map((f) => f.startTimeReferenceSamples)).size > 1) {
    delete format.startTimeReferenceSamples;
    delete format.startTimecode;
  }
  return format;
}

const blockFrames = 8192;

async function* joined(
  sources: readonly SampleSource[],
  encoding: Encoding,
  signal: AbortSignal,
  window?: FrameWindow,
) {
  const lanes = sources.map((source) => new Lane(source, encoding, signal, window));
  const bytes = new Uint8Array(blockFrames * sources.length * encoding.bytes);
  const silence = encoding.kind === 'unsigned' ? 128 : 0;
  try {
    for (;;) {
      bytes.fill(silence);
      let longest = 0;
      for (const [i, lane] of lanes.entries())
        longest = Math.max(
          longest,
          await lane.fill(bytes, i * encoding.bytes, sources.length * encoding.bytes),
        );
      if (longest === 0) return;
      yield { bytes: bytes.subarray(0, longest * sources.length * encoding.bytes), frames: longest };
    }
  } finally {
    // A reader who stops early leaves no part open.
    await Promise.all(lanes.map((lane) => lane.close()));
  }
}

/** One part, read in blocks of its own size and laid into frames of all. */
class Lane {
  readonly #blocks: AsyncIterator<{ bytes: Uint8Array; frames: number }>;
  readonly #put: (from: DataView, at: number, to: DataView, offset: number) => void;
  readonly #bytesEach: number;
  #block: { view: DataView; frames: number } | null = null;
  #at = 0;

  constructor(source: SampleSource, encoding: Encoding, signal: AbortSignal, window?: FrameWindow) {
    this.#blocks = source.blocks(signal, window)[Symbol.asyncIterator]();
    this.#bytesEach = source.encoding.bytes;
    const read = sampleReader(source.encoding);
    this.#put = isSame(source.encoding, encoding)
      ? (from, at, to, offset) => {
          for (let k = 0; k < encoding.bytes; k++) to.setUint8(offset + k, from.getUint8(at + k));
        }
      : (from, at, to, offset) => to.setFloat64(offset, read(from, at), true);
  }

  /** Lays a block's samples at `first`, `first + stride`, … as far as the part goes; gives how many there are. */
  async fill(out: Uint8Array, first: number, stride: number): Promise<number> {
    const to = new DataView(out.buffer, out.byteOffset, out.byteLength);
    let filled = 0;
    while (filled < blockFrames) {
      if (!this.#block || this.#at === this.#block.frames) {
        const { value, done } = await this.#blocks.next();
        if (done) break;
        this.#block = {
          view: new DataView(value.bytes.buffer, value.bytes.byteOffset, value.bytes.byteLength),
          frames: value.frames,
        };
        this.#at = 0;
      }
      const { view, frames } = this.#block;
      const count = Math.min(frames - this.#at, blockFrames - filled);
      for (let i = 0; i < count; i++)
        this.#put(view, (this.#at + i) * this.#bytesEach, to, first + (filled + i) * stride);
      this.#at += count;
      filled += count;
    }
    return filled;
  }

  async close(): Promise<void> {
    await this.#blocks.return?.();
  }
}
