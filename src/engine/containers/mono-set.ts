/** Several mono files that are one programme: found by their names, joined frame by frame in constant memory. */
import type { Finding } from '../figures.ts';
import { fromSpeakers, type Speaker } from '../layouts.ts';
import { speakerOfName } from '../presentations.ts';
import { UnreadableError, type FrameWindow, type SampleSource } from '../source.ts';
import { sampleReader, type Encoding } from './samples.ts';

export interface MonoSet<T> {
  /** What the names have in common. */
  name: string;
  /** In the layout's usual order. */
  parts: { file: T; speaker: Speaker }[];
}

const usualOrder: readonly Speaker[] = [
  ...(['L', 'R', 'C', 'LFE', 'Ls', 'Rs', 'Lrs', 'Rrs', 'Lss', 'Rss', 'Ltf', 'Rtf', 'Ltr', 'Rtr'] as const),
];

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
    // Two files for one loudspeaker make no set that anybody could have meant.
    set.parts.push({ file, speaker });
    sets.set(key, set);
  }
  return [...sets.values()]
    .filter(({ parts }) => parts.length > 1 && new Set(parts.map((p) => p.speaker)).size === parts.length)
    .map(({ name, parts }) => ({
      name,
      parts: parts.sort((a, b) => usualOrder.indexOf(a.speaker) - usualOrder.indexOf(b.speaker)),
    }));
}

const float64: Encoding = { kind: 'float', bytes: 8, littleEndian: true };

/**
 * The parts as one source: float64 frames, in the order given. A shorter part is followed by silence, which is told.
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
      ...sources[0].format,
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
    encoding: float64,
    blocks: (signal, window) => joined(sources, signal, window),
  };
}

const blockFrames = 8192;

async function* joined(sources: readonly SampleSource[], signal: AbortSignal, window?: FrameWindow) {
  const lanes = sources.map((source) => new Lane(source, signal, window));
  const bytes = new Uint8Array(blockFrames * sources.length * 8);
  const frames = new Float64Array(bytes.buffer);
  for (;;) {
    const counts: number[] = [];
    for (const lane of lanes) counts.push(await lane.fill());
    const longest = Math.max(...counts);
    if (longest === 0) return;
    lanes.forEach(({ samples }, c) => {
      for (let i = 0; i < longest; i++) frames[i * lanes.length + c] = i < counts[c] ? samples[i] : 0;
    });
    yield { bytes: bytes.subarray(0, longest * lanes.length * 8), frames: longest };
  }
}

/** One part, read in blocks of its own size and given in blocks of ours. */
class Lane {
  readonly samples = new Float64Array(blockFrames);
  readonly #blocks: AsyncIterator<{ bytes: Uint8Array; frames: number }>;
  readonly #read;
  readonly #bytesEach: number;
  #block: { view: DataView; frames: number } | null = null;
  #at = 0;

  constructor(source: SampleSource, signal: AbortSignal, window?: FrameWindow) {
    this.#blocks = source.blocks(signal, window)[Symbol.asyncIterator]();
    this.#read = sampleReader(source.encoding);
    this.#bytesEach = source.encoding.bytes;
  }

  /** Fills `samples` as far as the part goes; gives how many there are. */
  async fill(): Promise<number> {
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
        this.samples[filled + i] = this.#read(view, (this.#at + i) * this.#bytesEach);
      this.#at += count;
      filled += count;
    }
    return filled;
  }
}
