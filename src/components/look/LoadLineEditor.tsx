import { useId, useRef, useState, type KeyboardEvent, type PointerEvent } from 'react';
import { formatLimit, roundHalfAway } from '@/domain/figures-text.ts';
import { placeOn, scaleOf, type Limits, type Scale } from './load-line-scale.ts';

interface Props extends Limits {
  /** Key of the metric, which chooses the scale. */
  metric: string;
  /** 'LUFS', 'dBTP', 'LU', 's': written beside the handles and told by them. */
  unit: string;
  /** What is limited: 'Integrated loudness'. */
  label: string;
  /** New limits; one that is open stays open. They never cross. */
  onChange: (limits: Limits) => void;
  /** The figure aimed at, where the rule has one: a mark in the floor. */
  target?: number | null;
  /** Of one press of an arrow key, and the grid that dragging keeps to. */
  step?: number;
  disabled?: boolean;
}

const [width, deck, keel, height] = [520, 26.5, 50.5, 74];

type Held = 'atLeast' | 'atMost' | 'both';

/**
 * The load line as a control: each wall of the recess is dragged or moved by keys (arrows one step, Page ten, Home and End to
 * the scale's ends), its floor moves both. The scale stands still while something is held.
 */
export function LoadLineEditor(props: Props) {
  const {
    metric,
    atLeast,
    atMost,
    unit,
    label,
    onChange,
    target = null,
    step = 0.1,
    disabled = false,
  } = props;
  const hint = useId();
  const svg = useRef<SVGSVGElement>(null);
  const [held, setHeld] = useState<{ what: Held; scale: Scale; from: number; limits: Limits } | null>(null);
  const scale = held?.scale ?? scaleOf(metric, { atLeast, atMost }, 'row');
  const at = (value: number) => placeOn(scale, value, width);
  const left = atLeast === null ? 0 : at(atLeast);
  const right = atMost === null ? width : at(atMost);

  const onGrid = (value: number) => roundHalfAway(Math.round(value / step) * step, 3);
  const within = (value: number) => Math.min(scale.max, Math.max(scale.min, value));
  const move = (what: Held, limits: Limits, by: number) => {
    const low = limits.atLeast === null ? null : onGrid(limits.atLeast + (what === 'atMost' ? 0 : by));
    const high = limits.atMost === null ? null : onGrid(limits.atMost + (what === 'atLeast' ? 0 : by));
    // A wall stops at the other one.
    const crossed = low !== null && high !== null && low > high;
    const next =
      !crossed || what === 'both'
        ? { atLeast: low, atMost: high }
        : what === 'atLeast'
          ? { atLeast: high, atMost: high }
          : { atLeast: low, atMost: low };
    if (next.atLeast !== atLeast || next.atMost !== atMost) onChange(next);
  };
  const valueUnder = (event: PointerEvent) => {
    const box = svg.current?.getBoundingClientRect();
    if (!box || box.width === 0) return null;
    const x = ((event.clientX - box.left) / box.width) * width;
    return scale.min + ((x - 2) / (width - 4)) * (scale.max - scale.min);
  };
  const grab = (event: PointerEvent<SVGElement>, what: Held) => {
    const from = valueUnder(event);
    if (disabled || event.button !== 0 || from === null) return;
    event.currentTarget.setPointerCapture(event.pointerId);
    setHeld({ what, scale, from, limits: { atLeast, atMost } });
  };
  const drag = (event: PointerEvent) => {
    const now = held && valueUnder(event);
    if (held && now !== null) move(held.what, held.limits, within(now) - held.from);
  };
  const pointer = (what: Held) => ({
    onPointerDown: (event: PointerEvent<SVGElement>) => grab(event, what),
    onPointerMove: drag,
    onPointerUp: () => setHeld(null),
    onPointerCancel: () => setHeld(null),
  });
  const onKey = (event: KeyboardEvent, what: 'atLeast' | 'atMost', value: number) => {
    const by: Record<string, number> = {
      ArrowRight: step,
      ArrowUp: step,
      ArrowLeft: -step,
      ArrowDown: -step,
      PageUp: step * 10,
      PageDown: -step * 10,
      Home: scale.min - value,
      End: scale.max - value,
    };
    if (disabled || !(event.key in by)) return;
    event.preventDefault();
    move(what, { atLeast, atMost }, by[event.key]);
  };
  const wall = (what: 'atLeast' | 'atMost', value: number) => {
    const x = at(value);
    const name = what === 'atLeast' ? 'at least' : 'at most';
    return (
      <g
        key={what}
        role="slider"
        tabIndex={disabled ? -1 : 0}
        aria-label={`${label}, ${name}`}
        aria-valuemin={what === 'atLeast' ? scale.min : (atLeast ?? scale.min)}
        aria-valuemax={what === 'atMost' ? scale.max : (atMost ?? scale.max)}
        aria-valuenow={value}
        aria-valuetext={`${formatLimit(value)} ${unit}`}
        aria-describedby={hint}
        aria-disabled={disabled || undefined}
        className={`group touch-none outline-none ${disabled ? '' : 'cursor-ew-resize'}`}
        onKeyDown={(event) => onKey(event, what, value)}
        {...pointer(what)}
      >
        {/* A finger's width; the wall itself is a hairline. */}
        <rect x={x - 14} y="0" width="28" height={keel + 4} fill="transparent" />
        <path d={`M${x} ${deck - 6}V${keel + 3}`} className="stroke-ink" strokeWidth="2.4" />
        <rect
          x={x - 5}
          y={deck - 14}
          width="10"
          height="14"
          className="fill-sheet stroke-ink group-focus-visible:fill-teal group-focus-visible:stroke-teal"
          strokeWidth="1.4"
        />
        <rect
          x={x - 9}
          y={deck - 18}
          width="18"
          height="22"
          fill="none"
          className="stroke-transparent group-focus-visible:stroke-teal"
          strokeWidth="2"
        />
      </g>
    );
  };

  return (
    <div className="grid gap-0.5">
      <svg
        ref={svg}
        viewBox={`0 0 ${width} ${height}`}
        className={`block h-auto w-full max-w-[520px] select-none ${disabled ? 'opacity-60' : ''}`}
        role="group"
        aria-label={`${label}, permitted ${permitted({ atLeast, atMost }, unit)}`}
      >
        <rect
          x={left}
          y={deck + 4}
          width={Math.max(2, right - left)}
          height={keel - deck - 4}
          className={`touch-none fill-water ${disabled ? '' : 'cursor-move'}`}
          {...pointer('both')}
        />
        <path
          d={
            (atLeast === null ? `M0 ${keel}` : `M0 ${deck}H${left}V${keel}`) +
            `H${right}` +
            (atMost === null ? '' : `V${deck}H${width}`)
          }
          fill="none"
          className="stroke-muted"
          strokeWidth="1.4"
        />
        {target !== null && (
          <path
            d={`M${at(target)} ${keel - 8}v8`}
            className="pointer-events-none stroke-teal"
            strokeWidth="2"
          />
        )}
        {scale.ticks.map((tick) => (
          <g key={tick} className="pointer-events-none">
            <path d={`M${at(tick)} ${keel + 3}v4`} className="stroke-muted" />
            <text
              x={at(tick)}
              y={height - 4}
              textAnchor={at(tick) < 16 ? 'start' : at(tick) > width - 16 ? 'end' : 'middle'}
              className={`num text-[11.5px] ${tick === atLeast || tick === atMost ? 'fill-ink font-semibold' : 'fill-muted'}`}
            >
              {formatLimit(tick).replace(/\.0$/, '')}
            </text>
          </g>
        ))}
        {atLeast !== null && wall('atLeast', atLeast)}
        {atMost !== null && wall('atMost', atMost)}
      </svg>
      <p id={hint} className="sr-only">
        Arrow keys move this limit by {formatLimit(step)} {unit}.
      </p>
    </div>
  );
}

function permitted({ atLeast, atMost }: Limits, unit: string): string {
  if (atLeast === null && atMost === null) return 'anything';
  if (atLeast === null) return `at most ${formatLimit(atMost ?? 0)} ${unit}`;
  if (atMost === null) return `at least ${formatLimit(atLeast)} ${unit}`;
  return `${formatLimit(atLeast)} to ${formatLimit(atMost)} ${unit}`;
}
