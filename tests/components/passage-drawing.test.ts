// @vitest-environment jsdom
import type { Chart } from 'chart.js';
import { describe, expect, it } from 'vitest';
import { draughtsOf } from '@/components/passage/draughts.ts';
import { passageDrawing, type Drawn } from '@/components/passage/drawing.ts';
import { timeTicks } from '@/components/passage/time-ticks.ts';
import { specBodySchema } from '@/domain/spec.ts';

type Excursion = Drawn['passage']['excursions'][number];
const colours = Object.fromEntries(
  ['ground', 'sheet', 'ink', 'muted', 'hairline', 'hull', 'brass', 'teal', 'water', 'water-line'].map(
    (name) => [name, name],
  ),
) as Drawn['colours'];
const excursion = (
  number: number,
  startSeconds: number,
  breach: Excursion['breach'] = 'advise',
): Excursion => ({
  number,
  ruleId: 'short-term',
  name: 'Maximum short-term',
  breach,
  startSeconds,
  lengthSeconds: 0,
  worst: -17,
  beyond: 1,
  unit: 'LUFS',
});

/** Draws into a notebook: a chart of 100 px for 10 s, loudness 0 to -100 on 100 px. */
function drawnWith(given: Partial<Drawn> & { peaks?: (number | null)[]; shortTerm?: (number | null)[] }) {
  const rects: { style: string; x: number; y: number; w: number; h: number }[] = [];
  const texts: string[] = [];
  const ctx = new Proxy({ fillStyle: '' as string } as Record<string, unknown>, {
    get: (own, name: string) => {
      if (name === 'fillRect')
        return (x: number, y: number, w: number, h: number) =>
          rects.push({ style: String(own.fillStyle), x, y, w, h });
      if (name === 'fillText') return (text: string) => texts.push(text);
      if (name in own) return own[name];
      return () => undefined;
    },
    set: (own, name: string, value) => ((own[name] = value), true),
  });
  const chart = {
    ctx,
    chartArea: { left: 0, right: 100, top: 60, bottom: 160 },
    scales: {
      x: { min: 0, max: 10, getPixelForValue: (s: number) => s * 10 },
      y: { ticks: [], getPixelForValue: (v: number) => 60 - v },
    },
  } as unknown as Chart;
  const peaks = given.peaks ?? [];
  const drawn: Drawn = {
    passage: {
      stepSeconds: 0.1,
      shortTermLufs: given.shortTerm ?? [],
      momentaryLufs: [],
      truePeakDbtp: peaks,
      excursions: given.passage?.excursions ?? [],
    },
    draughts: [{ value: -1, of: 'truePeak', breach: 'reject', tolerance: 0, rounding: 'shown' }],
    colours,
    current: null,
    playing: null,
    ...given,
  };
  if (given.passage) drawn.passage = given.passage;
  const plugin = passageDrawing(() => drawn);
  plugin.beforeDatasetsDraw?.(chart, { cancelable: true }, {});
  plugin.afterDatasetsDraw?.(chart, {}, {}, false);
  return { rects, texts };
}
const withExcursions = (...excursions: Excursion[]): Drawn['passage'] => ({
  stepSeconds: 0.1,
  shortTermLufs: [],
  momentaryLufs: [],
  truePeakDbtp: [],
  excursions,
});

describe('what the passage chart draws', () => {
  it('hangs a louder peak lower', () => {
    const tallest = (level: number) =>
      Math.max(
        ...drawnWith({ peaks: Array.from({ length: 100 }, () => level) })
          .rects.filter((r) => r.style !== 'hull')
          .map((r) => r.h),
      );
    expect(tallest(-3)).toBeGreaterThan(tallest(-12));
    expect(tallest(-12)).toBeGreaterThan(0);
  });

  it('loses no peak between columns: one loud tenth of a second is drawn red', () => {
    const peaks = Array.from({ length: 100 }, (_, i) => (i === 47 ? 0.4 : -6));
    const red = drawnWith({ peaks }).rects.filter((r) => r.style === 'hull' && r.y < 10);
    expect(red).toHaveLength(1);
  });

  it('judges a peak as the spec does: -0.95 is shown as -1.0 and inside, unrounded it is beyond', () => {
    const red = (rounding: 'shown' | 'unrounded') =>
      drawnWith({
        peaks: Array.from({ length: 100 }, () => -0.95),
        draughts: [{ value: -1, of: 'truePeak', breach: 'reject', tolerance: 0, rounding }],
      }).rects.filter((r) => r.style === 'hull' && r.y < 10).length;
    expect(red('shown')).toBe(0);
    expect(red('unrounded')).toBeGreaterThan(0);
  });

  it('numbers excursions, and where two have no room keeps the one that rejects', () => {
    const { texts } = drawnWith({
      passage: withExcursions(excursion(1, 2), excursion(2, 5), excursion(3, 5.3, 'reject')),
    });
    expect(texts.filter((text) => /^\d+$/.test(text)).sort()).toEqual(['1', '3']);
  });

  it('always numbers the excursion in hand', () => {
    const passage = withExcursions(excursion(2, 5), excursion(3, 5.3, 'reject'));
    expect(drawnWith({ passage, current: 2 }).texts.filter((text) => /^\d+$/.test(text))).toEqual(['2']);
  });

  it('draws no flag outside the stretch shown', () => {
    expect(drawnWith({ passage: withExcursions(excursion(1, 12)) }).texts).not.toContain('1');
  });
});

describe('draught marks', () => {
  it('are the target and the upper limits that have a curve; range and facts have none', () => {
    const body = specBodySchema.parse({
      rules: [
        {
          id: 'integrated',
          kind: 'integrated',
          targetLufs: -23,
          toleranceAboveLu: 0.5,
          toleranceBelowLu: 0.5,
          breach: 'reject',
        },
        { id: 'peak', kind: 'limits', metric: 'truePeakDbtp', atLeast: null, atMost: -1, breach: 'reject' },
        {
          id: 'short',
          kind: 'limits',
          metric: 'shortTermMaxLufs',
          atLeast: null,
          atMost: -18,
          breach: 'advise',
        },
        { id: 'range', kind: 'limits', metric: 'rangeLu', atLeast: null, atMost: 18, breach: 'advise' },
        { id: 'rate', kind: 'oneOf', fact: 'sampleRateHz', allowed: ['48000'], breach: 'reject' },
      ],
    });
    const exact = { tolerance: 0, rounding: 'shown' };
    expect(draughtsOf(body)).toEqual([
      { value: -23, of: 'target', breach: 'reject', ...exact },
      { value: -1, of: 'truePeak', breach: 'reject', ...exact },
      { value: -18, of: 'shortTerm', breach: 'advise', ...exact },
    ]);
  });
});

describe('the time axis', () => {
  it('has round times, far enough apart for their labels', () => {
    expect(timeTicks(0, 3130, 920)).toEqual([0, 300, 600, 900, 1200, 1500, 1800, 2100, 2400, 2700, 3000]);
    expect(timeTicks(2751.3, 2757, 920)).toEqual([2752, 2753, 2754, 2755, 2756, 2757]);
  });

  it('has few on a narrow chart', () => {
    expect(timeTicks(0, 3130, 230).length).toBeLessThanOrEqual(4);
  });
});
