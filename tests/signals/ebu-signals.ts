/** The synthesizable minimum-requirement signals of EBU Tech 3341 (2023, Table 1) and Tech 3342 (2023), at any sample rate. */

type Planar = Float64Array[];
/** A stretch of 1 kHz at a peak level in dBFS per audio channel, or silence. */
interface Stretch {
  seconds: number;
  levelDbfs: readonly number[] | null;
}

const tone = (seconds: number, level: number): Stretch => ({ seconds, levelDbfs: [level, level] });
const silence = (seconds: number): Stretch => ({ seconds, levelDbfs: null });
const amplitude = (dbfs: number) => 10 ** (dbfs / 20);

/** 1 kHz whose phase runs on through changes of level; a boundary lies at the rounded sum of seconds. */
function stretches(parts: readonly Stretch[], rate: number, channels = 2): Planar {
  const seconds = parts.reduce((sum, part) => sum + part.seconds, 0);
  const out = Array.from({ length: channels }, () => new Float64Array(Math.round(seconds * rate)));
  let passed = 0;
  for (const part of parts) {
    const [start, end] = [Math.round(passed * rate), Math.round((passed + part.seconds) * rate)];
    passed += part.seconds;
    if (part.levelDbfs === null) continue;
    const [first, ...others] = part.levelDbfs;
    for (let n = start; n < end; n++)
      out[0][n] = amplitude(first) * Math.sin((2 * Math.PI * 1000 * n) / rate);
    others.forEach((level, i) => {
      for (let n = start; n < end; n++)
        out[i + 1][n] =
          level === first ? out[0][n] : amplitude(level) * Math.sin((2 * Math.PI * 1000 * n) / rate);
    });
  }
  return out;
}

/** A 1 s tone at a fraction of the rate with 10 ms linear fades, in both audio channels. */
function peakTone(fraction: number, peak: number, phaseDegrees: number, rate: number): Planar {
  const fade = 0.01 * rate;
  const one = Float64Array.from({ length: rate }, (_, n) => {
    const taper = Math.min(1, n / fade, (rate - 1 - n) / fade);
    return taper * peak * Math.sin(2 * Math.PI * fraction * n + (phaseDegrees * Math.PI) / 180);
  });
  return [one, one];
}

/** Zeroth-order modified Bessel function, for the Kaiser window. */
function bessel(x: number): number {
  let [sum, term] = [1, 1];
  for (let k = 1; k < 40; k++) {
    term *= (x / 2 / k) ** 2;
    sum += term;
  }
  return sum;
}

/** Cases 20 to 23: made at four times the rate, low-passed at half the rate, decimated from `offset`. */
function embeddedPeriod(offset: number, rate: number): Planar {
  const [seconds, period, insert] = [0.5, 24, 16];
  const wide = Array.from({ length: 4 * rate * seconds }, () => 0);
  const middle = Math.floor(wide.length / 2 / period) * period;
  const fade = 0.01 * 4 * rate;
  for (let n = 0; n < wide.length; n++) {
    const taper = Math.min(1, n / fade, (wide.length - 1 - n) / fade);
    const inside = n >= middle && n < middle + insert;
    const place = n < middle ? n : n - middle - insert;
    wide[n] =
      taper *
      (inside
        ? Math.sin((2 * Math.PI * (n - middle)) / insert)
        : 0.5 * Math.sin((2 * Math.PI * place) / period));
  }
  const half = 256;
  const kernel = Array.from({ length: 2 * half + 1 }, (_, i) => {
    const t = i - half;
    const sinc = t === 0 ? 0.25 : Math.sin((Math.PI * t) / 4) / (Math.PI * t);
    return (sinc * bessel(10 * Math.sqrt(1 - (t / half) ** 2))) / bessel(10);
  });
  const one = Float64Array.from({ length: Math.floor(wide.length / 4) - 1 }, (_, n) => {
    let sum = 0;
    for (let k = -half; k <= half; k++) sum += (wide[4 * n + offset + k] ?? 0) * kernel[k + half];
    return sum;
  });
  return [one, one];
}

export interface EbuSignal {
  id: string;
  /** Which figure the document states, its value and tolerances. */
  figure: 'integrated' | 'shortTermMax' | 'momentaryMax' | 'range' | 'truePeak';
  expected: number;
  plus: number;
  minus: number;
  make(rate: number): Planar;
}

const loudness = (
  id: string,
  figure: EbuSignal['figure'],
  expected: number,
  make: EbuSignal['make'],
): EbuSignal => ({ id, figure, expected, plus: 0.1, minus: 0.1, make });
const peak = (id: string, expected: number, make: EbuSignal['make']): EbuSignal => ({
  id,
  figure: 'truePeak',
  expected,
  plus: 0.2,
  minus: 0.4,
  make,
});
const repeat = (times: number, parts: Stretch[]) => Array.from({ length: times }, () => parts).flat();
const figures = ['integrated', 'shortTermMax', 'momentaryMax'] as const;

/** Case numbers are the documents' own. 7, 8, and 3342-5 and -6 are recordings and cannot be made. */
export const ebuSignals: readonly EbuSignal[] = [
  ...figures.map((figure) => loudness(`3341-1 ${figure}`, figure, -23, (r) => stretches([tone(20, -23)], r))),
  ...figures.map((figure) => loudness(`3341-2 ${figure}`, figure, -33, (r) => stretches([tone(20, -33)], r))),
  loudness('3341-3', 'integrated', -23, (r) => stretches([tone(10, -36), tone(60, -23), tone(10, -36)], r)),
  loudness('3341-4', 'integrated', -23, (r) =>
    stretches([tone(10, -72), tone(10, -36), tone(60, -23), tone(10, -36), tone(10, -72)], r),
  ),
  loudness('3341-5', 'integrated', -23, (r) => stretches([tone(20, -26), tone(20.1, -20), tone(20, -26)], r)),
  loudness('3341-6', 'integrated', -23, (r) =>
    stretches([{ seconds: 20, levelDbfs: [-28, -28, -24, -30, -30] }], r, 5),
  ),
  loudness('3341-9', 'shortTermMax', -23, (r) => stretches(repeat(5, [tone(1.34, -20), tone(1.66, -30)]), r)),
  ...Array.from({ length: 20 }, (_, i) =>
    loudness(`3341-10.${i}`, 'shortTermMax', -23, (r) =>
      stretches([silence(i * 0.15), tone(3, -23), silence(1)], r),
    ),
  ),
  ...Array.from({ length: 20 }, (_, i) =>
    loudness(`3341-11.${i}`, 'shortTermMax', -38 + i, (r) =>
      stretches([silence(i * 0.15), tone(3, -38 + i), silence(3 - i * 0.15)], r),
    ),
  ),
  loudness('3341-12', 'momentaryMax', -23, (r) =>
    stretches(repeat(25, [tone(0.18, -20), tone(0.22, -30)]), r),
  ),
  ...Array.from({ length: 20 }, (_, i) =>
    loudness(`3341-13.${i}`, 'momentaryMax', -23, (r) =>
      stretches([silence(i * 0.02), tone(0.4, -23), silence(1)], r),
    ),
  ),
  ...Array.from({ length: 20 }, (_, i) =>
    loudness(`3341-14.${i}`, 'momentaryMax', -38 + i, (r) =>
      stretches([silence(i * 0.02), tone(0.4, -38 + i), silence(0.4 - i * 0.02)], r),
    ),
  ),
  peak('3341-15', -6, (r) => peakTone(1 / 4, 0.5, 0, r)),
  peak('3341-16', -6, (r) => peakTone(1 / 4, 0.5, 45, r)),
  peak('3341-17', -6, (r) => peakTone(1 / 6, 0.5, 60, r)),
  peak('3341-18', -6, (r) => peakTone(1 / 8, 0.5, 67.5, r)),
  peak('3341-19', 3, (r) => peakTone(1 / 4, 1.41, 45, r)),
  ...[0, 1, 2, 3].map((offset) => peak(`3341-${20 + offset}`, 0, (r) => embeddedPeriod(offset, r))),
  ...(
    [
      ['3342-1', 10, [-20, -30]],
      ['3342-2', 5, [-20, -15]],
      ['3342-3', 20, [-40, -20]],
      ['3342-4', 15, [-50, -35, -20, -35, -50]],
    ] as const
  ).map(([id, expected, levels]): EbuSignal => ({
    id,
    figure: 'range',
    expected,
    plus: 1,
    minus: 1,
    make: (r) =>
      stretches(
        levels.map((level) => tone(20, level)),
        r,
      ),
  })),
];
