import {
  Chart as ChartJs,
  Decimation,
  Filler,
  LinearScale,
  LineController,
  LineElement,
  PointElement,
  type ChartOptions,
} from 'chart.js';
import type {} from 'chartjs-plugin-zoom';
import { useEffect, useMemo, useRef, useState, type KeyboardEvent } from 'react';
import { Line } from 'react-chartjs-2';
import type { Passage } from '@/domain/api/deliverables.ts';
import { formatDuration, formatTimecode } from '@/domain/figures-text.ts';
import { readColours, type Colours } from './colours.ts';
import { timeTicks } from './time-ticks.ts';
import { passageDrawing, peakBand, type Draught, type Drawn } from './drawing.ts';

ChartJs.register(LineController, LineElement, PointElement, LinearScale, Filler, Decimation);

interface Props {
  passage: Passage;
  draughts: Draught[];
  /** Seconds shown, from the address; `null`: all. */
  shown: [number, number] | null;
  onShown?: (range: [number, number] | null) => void;
  current: number | null;
  onCurrent?: (number: number) => void;
  onPlayFrom?: (seconds: number) => void;
  playing?: number | null;
  height?: number;
  /** How the time axis is written: round times are those of seconds + offset. */
  axis?: { offsetSeconds: number; label: (seconds: number) => string };
}

const plainAxis = { offsetSeconds: 0, label: formatDuration };

const lowest = -48;
/** Seconds: closer than this there is nothing more to see. */
const shortest = 2;
const points = (values: readonly (number | null)[], step: number) =>
  values.map((y, i) => ({ x: (i + 1) * step, y: y === null ? NaN : Math.max(y, lowest) }));

/** Loudness over time: short-term as water, momentary a faint line, true peak hanging from above, limits as draught marks. */
export function PassageChart({
  passage,
  draughts,
  shown,
  onShown,
  current,
  onCurrent,
  onPlayFrom,
  playing = null,
  height = 340,
  axis: timeAxis = plainAxis,
}: Props) {
  const [colours, setColours] = useState<Colours | null>(null);
  const chart = useRef<ChartJs<'line'> | null>(null);
  const length = passage.truePeakDbtp.length * passage.stepSeconds;
  const drawn = useRef<Drawn | null>(null);

  useEffect(() => {
    const read = () => setColours(readColours());
    let gone = false;
    // Its gestures ask for a window as soon as it is loaded, so the server must not load it.
    void import('chartjs-plugin-zoom').then(({ default: zoom }) => {
      if (gone) return;
      ChartJs.register(zoom);
      read();
      addEventListener('plimsoll-theme', read);
    });
    return () => {
      gone = true;
      removeEventListener('plimsoll-theme', read);
    };
  }, []);
  const drawing = useMemo(
    () =>
      passageDrawing(
        () => drawn.current ?? { passage, draughts, colours: readColours(), current: null, playing: null },
      ),
    [passage, draughts],
  );
  useEffect(() => {
    if (colours) drawn.current = { passage, draughts, colours, current, playing };
    chart.current?.draw();
  }, [passage, draughts, colours, current, playing]);

  const data = useMemo(
    () => ({
      datasets: [
        {
          data: points(passage.momentaryLufs, passage.stepSeconds),
          borderColor: colours?.['water-line'],
          borderWidth: 0.8,
          pointRadius: 0,
          order: 2,
        },
        {
          data: points(passage.shortTermLufs, passage.stepSeconds),
          borderColor: colours?.teal,
          backgroundColor: colours?.water,
          fill: 'start',
          borderWidth: 1.6,
          pointRadius: 0,
          order: 3,
        },
      ],
    }),
    [passage, colours],
  );
  const top = Math.max(-6, ...draughts.filter((d) => d.of !== 'truePeak').map((d) => d.value + 5));
  const options = useMemo<ChartOptions<'line'>>(
    () => ({
      parsing: false,
      normalized: true,
      animation: false,
      maintainAspectRatio: false,
      events: [],
      layout: { padding: { top: peakBand + 4, right: 72, bottom: 34, left: 2 } },
      scales: {
        x: {
          type: 'linear',
          min: shown?.[0] ?? 0,
          max: shown?.[1] ?? length,
          grid: { display: false },
          border: { color: colours?.ink },
          afterBuildTicks: (axis) => {
            const { offsetSeconds: offset } = timeAxis;
            axis.ticks = timeTicks(axis.min + offset, axis.max + offset, axis.width).map((value) => ({
              value: value - offset,
            }));
          },
          ticks: {
            autoSkip: false,
            color: colours?.muted,
            maxRotation: 0,
            font: { family: '"Sometype Mono Variable"', size: 11 },
            callback: (value) => timeAxis.label(Number(value)),
          },
        },
        y: { min: lowest, max: top, display: false, ticks: { stepSize: 6 } },
      },
      plugins: {
        decimation: { enabled: true, algorithm: 'min-max' },
        zoom: {
          limits: { x: { min: 0, max: length, minRange: shortest } },
          pan: {
            enabled: true,
            mode: 'x',
            onPanComplete: ({ chart: c }) => onShown?.([c.scales.x.min, c.scales.x.max]),
          },
          zoom: {
            wheel: { enabled: true, speed: 0.08 },
            pinch: { enabled: true },
            mode: 'x',
            onZoomComplete: ({ chart: c }) => onShown?.([c.scales.x.min, c.scales.x.max]),
          },
        },
      },
    }),
    // What is shown is set once; from then on the chart's own zoom holds it.
    [colours, length, top, timeAxis.offsetSeconds],
  );
  const showAll = () => {
    // Not the plugin's reset: that goes back to the stretch which the address gave.
    chart.current?.zoomScale('x', { min: 0, max: length });
    onShown?.(null);
  };
  const show = (from: number, span: number) => {
    const width = Math.min(length, Math.max(shortest, span));
    const min = Math.min(length - width, Math.max(0, from));
    chart.current?.zoomScale('x', { min, max: min + width });
    onShown?.([min, min + width]);
  };
  /** Around the excursion in hand where it is in sight, otherwise around the middle. */
  const zoomBy = (factor: number) => {
    if (!chart.current) return;
    const { min, max } = chart.current.scales.x;
    const flag = passage.excursions.find((one) => one.number === current);
    const at = flag ? flag.startSeconds + flag.lengthSeconds / 2 : NaN;
    const pivot = at >= min && at <= max ? at : (min + max) / 2;
    show(pivot - (pivot - min) * factor, (max - min) * factor);
  };
  const bringIntoView = ({ startSeconds, lengthSeconds }: Passage['excursions'][number]) => {
    if (!chart.current) return;
    const { min, max } = chart.current.scales.x;
    const middle = startSeconds + lengthSeconds / 2;
    if (middle < min || middle > max) show(middle - (max - min) / 2, max - min);
  };
  const onKeyDown = (event: KeyboardEvent) => {
    const flags = passage.excursions;
    const at = flags.findIndex((flag) => flag.number === current);
    if (event.key === 'ArrowRight' || event.key === 'ArrowLeft') {
      event.preventDefault();
      const next = flags[Math.min(flags.length - 1, Math.max(0, at + (event.key === 'ArrowRight' ? 1 : -1)))];
      if (!next) return;
      bringIntoView(next);
      onCurrent?.(next.number);
    } else if (event.key === 'Enter') {
      event.preventDefault();
      onPlayFrom?.(Math.max(0, (flags[at]?.startSeconds ?? 0) - 1));
    } else if (event.key === 'Escape') {
      showAll();
    } else if (event.key === '+' || event.key === '-') zoomBy(event.key === '+' ? 0.7 : 1 / 0.7);
  };
  const label = `Loudness over ${formatTimecode(length)}; ${passage.excursions.length === 0 ? 'no limit is passed' : `${passage.excursions.length} excursions, listed beneath`}. Arrow keys move by excursion, ${onPlayFrom ? 'Enter plays from there, ' : ''}plus and minus zoom, Escape shows all.`;
  return (
    <div className="relative">
      {shown && (
        <button
          type="button"
          className="absolute right-0 bottom-1.5 z-10 text-[12.5px] text-teal underline underline-offset-4"
          onClick={showAll}
        >
          Show all
        </button>
      )}
      {/* The chart is one composite control: its flags are walked by key and listed as text beneath it. */}
      {/* eslint-disable jsx-a11y/no-noninteractive-element-interactions, jsx-a11y/no-noninteractive-tabindex */}
      <div
        role="application"
        aria-label={label}
        tabIndex={0}
        onKeyDown={onKeyDown}
        style={{ height }}
        className="relative"
      >
        {colours && (
          <Line
            ref={(made) => {
              chart.current = made ?? null;
            }}
            data={data}
            options={options}
            plugins={[drawing]}
            // Its name and its keys are the frame's; what it shows stands as text beneath.
            role="presentation"
            aria-hidden="true"
            onDoubleClick={(event) => {
              const x = chart.current?.scales.x.getValueForPixel(event.nativeEvent.offsetX);
              if (x !== undefined) onPlayFrom?.(Math.max(0, x));
            }}
          />
        )}
      </div>
    </div>
  );
}
