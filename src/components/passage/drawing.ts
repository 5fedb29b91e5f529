/** What the passage chart draws itself over Chart.js's surface: peaks from the top, draught marks, hatching, flags. */
import type { Chart, Plugin } from 'chart.js';
import type { Passage } from '@/domain/api/deliverables.ts';
import { formatLevel, formatLimit, roundHalfAway } from '@/domain/figures-text.ts';
import type { SpecBody } from '@/domain/spec.ts';
import type { Colours } from './colours.ts';

/** A limit of the spec on the scale of loudness or of true peak. */
export interface Draught {
  value: number;
  of: 'shortTerm' | 'momentary' | 'truePeak' | 'target';
  breach: 'reject' | 'advise';
  /** As the spec judges: what still passes above `value`, and whether figures are rounded first. */
  tolerance: number;
  rounding: SpecBody['rounding'];
}

/** The same answer as the judge and the list of excursions give. */
const isBeyond = ({ value: limit, tolerance, rounding }: Draught, value: number): boolean =>
  (rounding === 'shown' ? roundHalfAway(value, 1) : value) > limit + tolerance + 1e-9;

export interface Drawn {
  passage: Passage;
  draughts: Draught[];
  colours: Colours;
  /** Number of the excursion in hand. */
  current: number | null;
  /** Where playback stands, seconds; `null` when nothing plays. */
  playing: number | null;
}

/** Height of the band in which true peak hangs, and what it spans in dB below and above full scale. */
export const peakBand = 58;
const peakTop = 3;
const peakBottom = -24;

/** A louder peak hangs lower: the line drops from the top edge towards the limit, and past it. */
const peakY = (chart: Chart, dbtp: number) =>
  chart.chartArea.top -
  peakBand +
  Math.min(1, Math.max(0, (dbtp - peakBottom) / (peakTop - peakBottom))) * peakBand;
const tone = (colours: Colours, breach: 'reject' | 'advise') =>
  breach === 'reject' ? colours.hull : colours.brass;

/** Largest of the values in each column of a pixel, so that an hour draws as fast as a minute and loses no peak. */
function columns(
  chart: Chart,
  values: readonly (number | null)[],
  step: number,
  draw: (x: number, value: number) => void,
  width = 1,
): void {
  const { left, right } = chart.chartArea;
  const { min, max } = chart.scales.x;
  const per = (max - min) / Math.max(1, right - left);
  for (let x = Math.floor(left); x <= right; x += width) {
    const from = Math.max(0, Math.floor((min + (x - left) * per) / step));
    const to = Math.min(
      values.length,
      Math.max(from + 1, Math.ceil((min + (x + width - left) * per) / step)),
    );
    let largest = -Infinity;
    for (let i = from; i < to; i++) largest = Math.max(largest, values[i] ?? -Infinity);
    if (largest > -Infinity) draw(x, largest);
  }
}

function hatched(context: CanvasRenderingContext2D, colour: string, ground: string): CanvasPattern | string {
  const tile = document.createElement('canvas');
  tile.width = tile.height = 6;
  const t = tile.getContext('2d');
  if (!t) return colour;
  t.fillStyle = ground;
  t.fillRect(0, 0, 6, 6);
  t.strokeStyle = colour;
  t.lineWidth = 1.6;
  t.beginPath();
  for (const shift of [-6, 0, 6]) {
    t.moveTo(shift, 6);
    t.lineTo(shift + 6, 0);
  }
  t.stroke();
  return context.createPattern(tile, 'repeat') ?? colour;
}

function drawPeaks(chart: Chart, { passage, draughts, colours }: Drawn): void {
  const { ctx, chartArea } = chart;
  const limit = draughts.find((d) => d.of === 'truePeak');
  const top = chartArea.top - peakBand;
  columns(
    chart,
    passage.truePeakDbtp,
    passage.stepSeconds,
    (x, value) => {
      const beyond = limit && isBeyond(limit, value);
      ctx.fillStyle = beyond ? tone(colours, limit.breach) : colours.muted;
      ctx.globalAlpha = beyond ? 1 : 0.45;
      ctx.fillRect(x, top, beyond ? 2 : 1, Math.max(0, peakY(chart, value) - top));
      // Lines with air between them, as from a row of plummets.
    },
    3,
  );
  ctx.globalAlpha = 1;
  if (!limit) return;
  const y = peakY(chart, limit.value);
  ctx.strokeStyle = colours.ink;
  ctx.lineWidth = 1;
  ctx.setLineDash([1, 3]);
  ctx.beginPath();
  ctx.moveTo(chartArea.left, y);
  ctx.lineTo(chartArea.right, y);
  ctx.stroke();
  ctx.setLineDash([]);
  ctx.fillStyle = tone(colours, limit.breach);
  ctx.fillRect(chartArea.right, y - 1, 7, 2);
  ctx.fillText(`${formatLimit(limit.value).replace(/\.0$/, '')} dBTP`, chartArea.right + 11, y);
}

function drawBeyond(chart: Chart, { passage, draughts, colours }: Drawn): void {
  const { ctx, chartArea, scales } = chart;
  for (const draught of draughts) {
    if (draught.of !== 'shortTerm' && draught.of !== 'momentary') continue;
    const values = draught.of === 'shortTerm' ? passage.shortTermLufs : passage.momentaryLufs;
    const y = scales.y.getPixelForValue(draught.value);
    ctx.fillStyle = hatched(ctx, tone(colours, draught.breach), colours.sheet);
    columns(chart, values, passage.stepSeconds, (x, value) => {
      const surface = Math.max(chartArea.top, scales.y.getPixelForValue(value));
      if (isBeyond(draught, value)) ctx.fillRect(x, surface, 1, Math.max(2, y - surface));
    });
  }
}

function drawDraughts(chart: Chart, { draughts, colours }: Drawn): void {
  const { ctx, chartArea, scales } = chart;
  const marks = draughts
    .filter((d) => d.of !== 'truePeak')
    .map((d) => ({ ...d, y: scales.y.getPixelForValue(d.value) }));
  const peak = draughts.find((d) => d.of === 'truePeak');
  const peakLimitY = peak ? peakY(chart, peak.value) : -Infinity;
  for (const tick of scales.y.ticks) {
    const y = scales.y.getPixelForValue(tick.value);
    if (marks.some((mark) => Math.abs(mark.y - y) < 13) || Math.abs(peakLimitY - y) < 13) continue;
    ctx.fillStyle = colours.muted;
    ctx.fillRect(chartArea.right, y, 7, 1);
    ctx.fillText(formatLevel(tick.value, 0), chartArea.right + 11, y);
  }
  for (const { y, value, of, breach } of marks) {
    if (y < chartArea.top || y > chartArea.bottom) continue;
    const colour = of === 'target' ? colours.ink : tone(colours, breach);
    ctx.fillStyle = ctx.strokeStyle = colour;
    ctx.fillRect(chartArea.right, y - 1, of === 'target' ? 14 : 18, 2);
    ctx.setLineDash(of === 'target' ? [6, 3] : [2, 3]);
    ctx.lineWidth = 0.8;
    ctx.beginPath();
    ctx.moveTo(chartArea.left, y);
    ctx.lineTo(chartArea.right, y);
    ctx.stroke();
    ctx.setLineDash([]);
    ctx.fillText(formatLevel(value).replace(/\.0$/, ''), chartArea.right + 22, y);
  }
}

/** Half a flag's size; flags stand in the strip under the time axis. */
const flag = 9;

/** The one in hand first, then what rejects, then by time: whoever comes first keeps the room for its number. */
function inOrderOfWeight({ excursions }: Passage, current: number | null): Passage['excursions'] {
  const weight = (one: Passage['excursions'][number]) =>
    one.number === current ? 0 : one.breach === 'reject' ? 1 : 2;
  return [...excursions].sort((a, b) => weight(a) - weight(b) || a.number - b.number);
}

function drawFlags(chart: Chart, { passage, colours, current, playing }: Drawn): void {
  const { ctx, chartArea, scales } = chart;
  ctx.textAlign = 'center';
  const y = chartArea.bottom + 38;
  const taken: number[] = [];
  for (const excursion of inOrderOfWeight(passage, current)) {
    const x = scales.x.getPixelForValue(excursion.startSeconds + excursion.lengthSeconds / 2);
    if (x < chartArea.left || x > chartArea.right) continue;
    if (taken.some((other) => Math.abs(other - x) < 2 * flag + 3)) {
      // No room for its number at this zoom; the list has it.
      ctx.fillStyle = tone(colours, excursion.breach);
      ctx.fillRect(x - 0.75, chartArea.bottom + 22, 1.5, 6);
      continue;
    }
    taken.push(x);
    ctx.fillStyle = ctx.strokeStyle = tone(colours, excursion.breach);
    ctx.setLineDash([1, 4]);
    ctx.beginPath();
    ctx.moveTo(x, chartArea.top - peakBand);
    ctx.lineTo(x, chartArea.bottom);
    ctx.moveTo(x, chartArea.bottom + 22);
    ctx.lineTo(x, y - flag);
    ctx.stroke();
    ctx.setLineDash([]);
    ctx.fillRect(x - flag, y - flag, 2 * flag, 2 * flag);
    if (excursion.number === current)
      ctx.strokeRect(x - flag - 2.5, y - flag - 2.5, 2 * flag + 5, 2 * flag + 5);
    ctx.fillStyle = colours.sheet;
    ctx.fillText(String(excursion.number), x, y + 0.5);
  }
  ctx.textAlign = 'left';
  if (playing === null) return;
  const x = scales.x.getPixelForValue(playing);
  if (x < chartArea.left || x > chartArea.right) return;
  ctx.fillStyle = colours.teal;
  ctx.fillRect(x - 0.75, chartArea.top - peakBand, 1.5, chartArea.bottom - chartArea.top + peakBand);
}

const face = '11px "Sometype Mono Variable", monospace';

/** Draws from whatever `read` gives at the time, so that playback moves without making the chart anew. */
export const passageDrawing = (read: () => Drawn): Plugin => ({
  id: 'passage',
  beforeDatasetsDraw(chart) {
    const drawn = read();
    chart.ctx.save();
    chart.ctx.textBaseline = 'middle';
    chart.ctx.font = face;
    drawPeaks(chart, drawn);
    chart.ctx.restore();
  },
  afterDatasetsDraw(chart) {
    const drawn = read();
    chart.ctx.save();
    chart.ctx.textBaseline = 'middle';
    chart.ctx.font = face;
    drawBeyond(chart, drawn);
    drawDraughts(chart, drawn);
    drawFlags(chart, drawn);
    chart.ctx.restore();
  },
});
