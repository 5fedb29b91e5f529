import { BenchProblem, type BenchResult, type Crew } from './crew.ts';

/** waiting: for a free core; decoding: by the browser, as a whole; unreadable: no figures, and why; stopped: by the person. */
export type BenchState = 'waiting' | 'decoding' | 'measuring' | 'measured' | 'unreadable' | 'stopped';

export interface BenchItem {
  readonly id: string;
  readonly file: File;
  readonly state: BenchState;
  readonly secondsDone: number;
  readonly secondsTotal: number | null;
  /** What went wrong, what to do. */
  readonly message: string | null;
  readonly result: BenchResult | null;
}

export interface BenchTotals {
  files: number;
  /** Of them at an end, whichever. */
  ended: number;
  /** Share of the bytes that are read, 0 to 1. */
  done: number;
  /** Programme seconds measured per second of work; `null` before half a second of it. */
  timesRealTime: number | null;
  secondsLeft: number | null;
}

interface Entry {
  item: BenchItem;
  stop: AbortController;
  /** Put here since the bench was last idle: the same number. */
  batch: number;
}

const tellEveryMs = 100;
const isOpen = ({ state }: BenchItem) => state === 'waiting' || state === 'decoding' || state === 'measuring';

/** Measures many files, as many at once as the crew has hands, in their order. Nothing of it needs a browser. */
export class BenchQueue {
  private entries: Entry[] = [];
  private snapshot: readonly BenchItem[] = [];
  private readonly listeners = new Set<() => void>();
  private count = 0;
  private toldAtMs = 0;
  private begunAtMs = 0;
  private batch = 0;

  constructor(
    private readonly crew: Crew,
    private readonly nowMs: () => number = () => performance.now(),
  ) {}

  subscribe = (listener: () => void): (() => void) => {
    this.listeners.add(listener);
    return () => void this.listeners.delete(listener);
  };
  items = (): readonly BenchItem[] => this.snapshot;

  /** Takes files, leaving out those that lie here already (same name, size, time of change); answers with how many were left out. */
  add(files: readonly File[]): { leftOut: number } {
    const lies = (file: File) =>
      this.entries.some(
        ({ item }) =>
          item.state !== 'stopped' &&
          item.file.name === file.name &&
          item.file.size === file.size &&
          item.file.lastModified === file.lastModified,
      );
    const fresh = files.filter((file) => !lies(file));
    this.beginBatch();
    for (const file of fresh)
      this.entries.push({
        item: {
          id: `file-${++this.count}`,
          file,
          state: 'waiting',
          secondsDone: 0,
          secondsTotal: null,
          message: null,
          result: null,
        },
        stop: new AbortController(),
        batch: this.batch,
      });
    this.tell();
    this.pump();
    return { leftOut: files.length - fresh.length };
  }

  /** Stops a file that waits or is being measured; it stays on the bench and can be begun anew. */
  cancel(id: string): void {
    this.halt((item) => item.id === id);
  }

  cancelAll(): void {
    this.halt(() => true);
  }

  private halt(which: (item: BenchItem) => boolean): void {
    // All before the next one is begun.
    const halted = this.entries.filter(({ item }) => isOpen(item) && which(item));
    for (const entry of halted) {
      this.change(entry, { state: 'stopped', secondsDone: 0, message: null });
      entry.stop.abort();
    }
    this.pump();
  }

  /** Begins anew what was stopped or could not be read. */
  again(id: string): void {
    const entry = this.find(id);
    if (!entry || (entry.item.state !== 'stopped' && entry.item.state !== 'unreadable')) return;
    this.beginBatch();
    entry.stop = new AbortController();
    entry.batch = this.batch;
    this.change(entry, { state: 'waiting', secondsDone: 0, secondsTotal: null, message: null });
    this.pump();
  }

  /** Takes files off the bench, whatever they are at. */
  remove(ids: ReadonlySet<string>): void {
    this.halt(({ id }) => ids.has(id));
    this.entries = this.entries.filter(({ item }) => !ids.has(item.id));
    this.tell();
  }

  /** Of the files put on the bench since it was last idle; what was stopped does not count. */
  totals(): BenchTotals {
    const counted = this.entries
      .filter(({ batch, item }) => batch === this.batch && item.state !== 'stopped')
      .map(({ item }) => item);
    const bytes = counted.reduce((sum, { file }) => sum + file.size, 0);
    const read = counted.reduce((sum, item) => sum + item.file.size * shareOf(item), 0);
    const open = counted.filter(isOpen).length;
    const worked = (this.nowMs() - this.begunAtMs) / 1000;
    const told = open > 0 && worked >= 0.5;
    const done = bytes > 0 ? read / bytes : 1;
    return {
      files: counted.length,
      ended: counted.length - open,
      done,
      timesRealTime: told ? counted.reduce((sum, { secondsDone }) => sum + secondsDone, 0) / worked : null,
      secondsLeft: told && done > 0.01 ? (worked * (1 - done)) / done : null,
    };
  }

  private beginBatch(): void {
    if (this.entries.some(({ item }) => isOpen(item))) return;
    this.batch++;
    this.begunAtMs = this.nowMs();
  }

  private find(id: string): Entry | undefined {
    return this.entries.find(({ item }) => item.id === id);
  }

  private pump(): void {
    let busy = this.entries.filter(({ item }) => isOpen(item) && item.state !== 'waiting').length;
    for (const entry of this.entries) {
      if (busy >= this.crew.size) return;
      if (entry.item.state !== 'waiting') continue;
      busy++;
      void this.run(entry, entry.stop.signal);
    }
  }

  private async run(entry: Entry, signal: AbortSignal): Promise<void> {
    this.change(entry, { state: 'measuring' });
    const still = (changes: Partial<BenchItem>, kind?: 'progress') => {
      if (!signal.aborted) this.change(entry, changes, kind);
    };
    try {
      const result = await this.crew.measure(entry.item.file, {
        onDecoding: () => still({ state: 'decoding' }),
        onProgress: (secondsDone, secondsTotal) =>
          still({ state: 'measuring', secondsDone, secondsTotal }, 'progress'),
        signal,
      });
      const seconds = result.measured.measurement.figures.measuredSeconds;
      still({ state: 'measured', result, secondsDone: seconds, secondsTotal: seconds });
    } catch (error) {
      if (!signal.aborted && !(error instanceof BenchProblem))
        console.error('The bench could not measure a file:', error);
      still({
        state: 'unreadable',
        message:
          error instanceof BenchProblem
            ? error.message
            : 'Measuring broke down for a reason that this page does not know. The other files go on; try this one again.',
      });
    }
    this.pump();
  }

  private change(entry: Entry, changes: Partial<BenchItem>, kind: 'step' | 'progress' = 'step'): void {
    entry.item = { ...entry.item, ...changes };
    if (kind === 'progress' && this.nowMs() - this.toldAtMs < tellEveryMs) return;
    this.tell();
  }

  private tell(): void {
    this.toldAtMs = this.nowMs();
    this.snapshot = this.entries.map(({ item }) => item);
    for (const listener of this.listeners) listener();
  }
}

/** How much of a file is done, 0 to 1. */
function shareOf(item: BenchItem): number {
  if (!isOpen(item)) return 1;
  return item.secondsTotal ? Math.min(1, item.secondsDone / item.secondsTotal) : 0;
}
