/** The scale that a load line draws around its limits. */

export interface Limits {
  atLeast: number | null;
  atMost: number | null;
}

export interface Scale {
  min: number;
  max: number;
  ticks: number[];
}

/** How much of the scale stands on the open and on the closed side of a one-sided limit, by metric: [inside, beyond]. */
const oneSided: Record<string, { cell: [number, number]; row: [number, number] }> = {
  truePeakDbtp: { cell: [3.5, 2.5], row: [11, 4] },
  samplePeakDbfs: { cell: [3.5, 2.5], row: [11, 4] },
  rangeLu: { cell: [10, 6], row: [18, 12] },
  durationSeconds: { cell: [60, 60], row: [120, 60] },
  silenceHeadSeconds: { cell: [2, 2], row: [4, 4] },
  silenceTailSeconds: { cell: [2, 2], row: [4, 4] },
  silenceInsideSeconds: { cell: [2, 2], row: [4, 4] },
  dcOffsetPercent: { cell: [0.5, 0.5], row: [1, 1] },
  correlationLowest: { cell: [1, 0.7], row: [1.3, 0.7] },
  outOfPhasePercent: { cell: [5, 10], row: [5, 20] },
  bandwidthHz: { cell: [4000, 6000], row: [6000, 8000] },
  bitRateKbps: { cell: [128, 64], row: [256, 128] },
};
/** Figures that are never negative. */
const fromZero = new Set([
  ...['rangeLu', 'durationSeconds', 'silenceHeadSeconds', 'silenceTailSeconds', 'silenceInsideSeconds'],
  ...[
    'dropOutCount',
    'clippedRunCount',
    'dcOffsetPercent',
    'outOfPhasePercent',
    'bandwidthHz',
    'bitRateKbps',
  ],
]);
const otherwise = { cell: [5, 3.5], row: [9, 6] } as const;

const round = (value: number) => Math.round(value * 100) / 100;

/** Ticks at the limits and at round steps that stand clear of them. */
function ticksOf(min: number, max: number, limits: Limits): number[] {
  const span = max - min;
  const step =
    [0.5, 1, 2, 3, 5, 10, 20, 30, 60, 120, 300, 600, 1800, 5000].find((s) => span / s <= 6) ?? span / 4;
  const fixed = [limits.atLeast, limits.atMost].filter((limit): limit is number => limit !== null);
  const steps: number[] = [];
  for (let t = Math.ceil(min / step) * step; t <= max + 1e-9; t += step)
    if (fixed.every((limit) => Math.abs(limit - t) > span * 0.08)) steps.push(round(t));
  // Two limits close together share one label: the middle would lie, so only the upper one is written.
  const labels = fixed.length === 2 && fixed[1] - fixed[0] < span * 0.1 ? [fixed[1]] : fixed;
  return [...steps, ...labels].sort((a, b) => a - b);
}

/** A scale for a metric's limits in a table cell or a report row. Depends on the limits only, so that rows compare. */
export function scaleOf(metric: string, limits: Limits, size: 'cell' | 'row'): Scale {
  const { atLeast, atMost } = limits;
  let min: number;
  let max: number;
  if (atLeast !== null && atMost !== null) {
    const margin =
      size === 'cell' ? Math.max(1.5, (atMost - atLeast) * 1.5) : Math.max(4, (atMost - atLeast) * 2);
    [min, max] = [atLeast - margin, atMost + margin];
  } else {
    const [inside, beyond] = (oneSided[metric] ?? otherwise)[size];
    [min, max] =
      atMost !== null
        ? [atMost - inside, atMost + beyond]
        : [(atLeast ?? 0) - beyond, (atLeast ?? 0) + inside];
  }
  if (fromZero.has(metric)) min = Math.max(0, min);
  [min, max] = [round(min), round(max)];
  return { min, max, ticks: ticksOf(min, max, limits) };
}

/** Where a value stands on a scale drawn `width` wide; what is off it stands at the end, short of the chevron. */
export const placeOn = ({ min, max }: Scale, value: number, width: number): number =>
  value > max ? width - 9 : value < min ? 9 : 2 + ((width - 4) * (value - min)) / (max - min);
