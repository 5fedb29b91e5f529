import { describe, expect, it } from 'vitest';
import { BenchQueue } from '../../../src/components/bench/bench-queue.ts';
import {
  BenchProblem,
  type BenchResult,
  type Crew,
  type CrewOptions,
} from '../../../src/components/bench/crew.ts';
import { wholeLayout } from '../../../src/engine/plan.ts';
import { layoutOfCount } from '../../../src/engine/layouts.ts';

/** A crew that does as the test says, file by file. */
class HandCrew implements Crew {
  readonly begun: string[] = [];
  private readonly hands = new Map<
    string,
    CrewOptions & { resolve: (result: BenchResult) => void; reject: (error: unknown) => void }
  >();
  constructor(readonly size: number) {}
  measure(file: File, options: CrewOptions): Promise<BenchResult> {
    this.begun.push(file.name);
    return new Promise((resolve, reject) => {
      options.signal.addEventListener('abort', () => reject(options.signal.reason as Error));
      this.hands.set(file.name, { ...options, resolve, reject });
    });
  }
  hand(name: string) {
    const hand = this.hands.get(name);
    if (!hand) throw new Error(`${name} was not begun`);
    return hand;
  }
}

const file = (name: string, size = 100) => new File([new Uint8Array(size)], name, { lastModified: 1 });
const result = (measuredSeconds: number): BenchResult => ({
  measured: {
    presentation: wholeLayout(layoutOfCount(2)),
    measurement: {
      format: {
        container: 'WAV',
        codec: 'PCM',
        sampleRateHz: 48_000,
        bitDepth: 24,
        channels: 2,
        layout: 'stereo',
        durationSeconds: measuredSeconds,
      },
      figures: {
        loudness: {
          integratedLufs: -23,
          relativeThresholdLufs: -33,
          rangeLu: 5,
          rangeLowLufs: -26,
          rangeHighLufs: -21,
          momentaryMaxLufs: -18,
          shortTermMaxLufs: -20,
        },
        truePeak: { maxDbtp: -3, perChannelDbtp: [-3, -3] },
        samplePeak: { maxDbfs: -3, perChannelDbfs: [-3, -3] },
        times: { momentaryMaxAtSeconds: 1, shortTermMaxAtSeconds: 3, truePeakMaxAtSeconds: 1 },
        measuredSeconds,
      },
      findings: [],
    },
    series: {
      stepSeconds: 0.01,
      energy: new Float64Array(0),
      truePeak: new Float32Array(0),
      channelCount: 2,
      channelEnergy: new Float32Array(0),
    },
  },
  seconds: 0.1,
  preview: null,
});
/** Lets what was settled be acted on. */
const settle = () => new Promise<void>((resolve) => setImmediate(resolve));
const states = (queue: BenchQueue) => queue.items().map(({ file: { name }, state }) => `${name} ${state}`);

describe('the queue of the bench', () => {
  it('has as many files in hand as there are hands, in their order', async () => {
    const crew = new HandCrew(2);
    const queue = new BenchQueue(crew);
    queue.add([file('a'), file('b'), file('c')]);
    expect(crew.begun).toEqual(['a', 'b']);
    crew.hand('a').resolve(result(10));
    await settle();
    expect(crew.begun).toEqual(['a', 'b', 'c']);
    expect(states(queue)).toEqual(['a measured', 'b measuring', 'c measuring']);
  });

  it('says of a file that cannot be read why, and goes on with the others', async () => {
    const crew = new HandCrew(1);
    const queue = new BenchQueue(crew);
    queue.add([file('notes.txt'), file('b')]);
    crew.hand('notes.txt').reject(new BenchProblem('This is no audio file.', 'file'));
    await settle();
    expect(queue.items()[0]).toMatchObject({ state: 'unreadable', message: 'This is no audio file.' });
    expect(crew.begun).toEqual(['notes.txt', 'b']);
  });

  it('stops one file at once, hears nothing more of it, and begins it anew when asked', async () => {
    const crew = new HandCrew(1);
    const queue = new BenchQueue(crew);
    queue.add([file('a'), file('b')]);
    const late = crew.hand('a');
    queue.cancel(queue.items()[0].id);
    expect(late.signal.aborted).toBe(true);
    late.onProgress(5, 10);
    late.resolve(result(10));
    await settle();
    expect(states(queue)).toEqual(['a stopped', 'b measuring']);
    queue.again(queue.items()[0].id);
    crew.hand('b').resolve(result(10));
    await settle();
    crew.hand('a').resolve(result(10));
    await settle();
    expect(states(queue)).toEqual(['a measured', 'b measured']);
  });

  it('stops them all without beginning the next', async () => {
    const crew = new HandCrew(1);
    const queue = new BenchQueue(crew);
    queue.add([file('a'), file('b'), file('c')]);
    queue.cancelAll();
    await settle();
    expect(states(queue)).toEqual(['a stopped', 'b stopped', 'c stopped']);
    expect(crew.begun).toEqual(['a']);
  });

  it('frees its hand when a file in work is taken off', async () => {
    const crew = new HandCrew(1);
    const queue = new BenchQueue(crew);
    queue.add([file('a'), file('b')]);
    queue.remove(new Set([queue.items()[0].id]));
    await settle();
    expect(states(queue)).toEqual(['b measuring']);
  });

  it('leaves out a file that lies on the bench already, and says so', () => {
    const queue = new BenchQueue(new HandCrew(1));
    expect(queue.add([file('a'), file('b')])).toEqual({ leftOut: 0 });
    expect(queue.add([file('a'), file('c')])).toEqual({ leftOut: 1 });
    expect(queue.add([file('a', 101)])).toEqual({ leftOut: 0 });
    expect(queue.items()).toHaveLength(4);
  });

  it('tells progress by bytes over all files, and the speed as a multiple of real time', async () => {
    let now = 0;
    const crew = new HandCrew(2);
    const queue = new BenchQueue(crew, () => now);
    queue.add([file('a', 100), file('b', 300)]);
    now = 1000;
    crew.hand('a').onProgress(50, 100);
    expect(queue.totals()).toEqual({ files: 2, ended: 0, done: 0.125, timesRealTime: 50, secondsLeft: 7 });
    now = 2000;
    crew.hand('a').resolve(result(100));
    await settle();
    crew.hand('b').onProgress(150, 300);
    expect(queue.totals()).toMatchObject({ files: 2, ended: 1, done: 0.625, timesRealTime: 125 });
    crew.hand('b').resolve(result(300));
    await settle();
    expect(queue.totals()).toMatchObject({ ended: 2, done: 1, timesRealTime: null, secondsLeft: null });
    // What is put on later is counted by itself.
    queue.add([file('c', 10)]);
    expect(queue.totals()).toMatchObject({ files: 1, done: 0 });
  });
});
