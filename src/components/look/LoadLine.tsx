import { useId } from 'react';
import { formatLevel } from '@/domain/figures-text.ts';
import type { Outcome } from '@/domain/vocabulary.ts';
import { placeOn, scaleOf, type Limits } from './load-line-scale.ts';

interface Props extends Limits {
  /** Key of the metric, which chooses the scale. */
  metric: string;
  /** The judged figure; `null` draws the recess alone. */
  value: number | null;
  outcome: Outcome;
  size: 'cell' | 'row';
  width?: number;
  /** Text equivalent: 'Maximum true peak +0.3 dBTP, 1.3 dB over'. */
  label: string;
}

/**
 * The product's own gauge: a scale with a recess cut into it, the permitted interval. The plumb-bob drops into the recess,
 * which holds water; beyond, it stands on deck and the overshoot is hatched. A value off the scale carries a chevron.
 */
export function LoadLine({
  metric,
  value,
  atLeast,
  atMost,
  outcome,
  size,
  label,
  width = size === 'cell' ? 84 : 390,
}: Props) {
  const hatch = useId();
  const height = size === 'cell' ? 18 : 26;
  const scale = scaleOf(metric, { atLeast, atMost }, size);
  const { min, max, ticks } = scale;
  const deck = Math.round(height * 0.48) + 0.5;
  const keel = Math.round(height * 0.86) + 0.5;
  const place = (v: number) => placeOn(scale, v, width);
  const left = atLeast === null ? 0 : place(atLeast);
  const right = atMost === null ? width : place(atMost);
  const over = value !== null && atMost !== null && value > atMost;
  const under = value !== null && atLeast !== null && value < atLeast;
  const beyond = over || under;
  const tone = !beyond
    ? 'text-ink'
    : outcome === 'fail'
      ? 'text-hull'
      : outcome === 'advisory'
        ? 'text-brass'
        : 'text-muted';
  const x = value === null ? 0 : place(value);
  const stands = beyond ? deck : keel;
  const limit = over ? right : left;
  const outline =
    (atLeast === null ? `M0 ${keel}` : `M0 ${deck}H${left}V${keel}`) +
    `H${right}` +
    (atMost === null ? '' : `V${deck}H${width}`);
  const off = value !== null && value > max ? 1 : value !== null && value < min ? -1 : 0;
  const edge = off > 0 ? width - 1 : 1;
  return (
    <svg
      width={width}
      height={height + (size === 'row' ? 16 : 0)}
      viewBox={`0 0 ${width} ${height + (size === 'row' ? 16 : 0)}`}
      role="img"
      aria-label={label}
      className={`block ${size === 'cell' ? 'shrink-0' : 'max-w-full'} ${tone}`}
    >
      {beyond && (
        <>
          <defs>
            <pattern
              id={hatch}
              width="4"
              height="4"
              patternUnits="userSpaceOnUse"
              patternTransform="rotate(45)"
            >
              <path d="M0 0V4" stroke="currentColor" strokeWidth="1.6" />
            </pattern>
          </defs>
          <rect
            x={Math.min(limit, x)}
            y={deck - height * 0.3}
            width={Math.max(2, Math.abs(x - limit))}
            height={height * 0.3}
            fill={`url(#${hatch})`}
          />
        </>
      )}
      {!beyond && value !== null && (
        <path d={`M${left} ${deck + 1.5}H${right}V${keel}H${left}Z`} className="fill-water" />
      )}
      <path d={outline} fill="none" className="stroke-muted" strokeWidth="1.2" />
      {value !== null && (
        <>
          <path d={`M${x} 0V${stands - 3}`} stroke="currentColor" strokeWidth={beyond ? 2 : 1.6} />
          <path d={`M${x - 3.4} ${stands - 5.5}h6.8L${x} ${stands}z`} fill="currentColor" />
        </>
      )}
      {beyond && off !== 0 && (
        <path
          d={`M${edge - off * 5} ${deck - height * 0.42}l${off * 5} ${height * 0.15}l${-off * 5} ${height * 0.15}`}
          fill="none"
          stroke="currentColor"
          strokeWidth="1.6"
        />
      )}
      {size === 'row' &&
        ticks.map((tick) => (
          <g key={tick}>
            <path d={`M${place(tick)} ${keel + 2}v3`} className="stroke-muted" />
            <text
              x={place(tick)}
              y={height + 13}
              textAnchor={place(tick) < 14 ? 'start' : place(tick) > width - 14 ? 'end' : 'middle'}
              className="num fill-muted text-[10.5px]"
            >
              {formatLevel(tick).replace(/\.0$/, '')}
            </text>
          </g>
        ))}
    </svg>
  );
}
