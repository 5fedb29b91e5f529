/** Figures in words: one decimal for levels, a true minus sign, units after. */

export const minus = '\u2212';

/** Rounds half away from zero (as a readout does); -0 comes out as 0. */
export function roundHalfAway(value: number, decimals: number): number {
  const scale = 10 ** decimals;
  const scaled = Math.abs(value) * scale;
  // 0.15 x 10 is 1.4999999999999998: what is a half but for the error of binary fractions is a half.
  const rounded = Math.floor(scaled + 0.5 + scaled * Number.EPSILON * 4) / scale;
  return rounded === 0 ? 0 : Math.sign(value) * rounded;
}

/** '−23.0'; 'no value' for `null`. */
export function formatLevel(value: number | null, decimals = 1): string {
  if (value === null) return 'no value';
  const rounded = roundHalfAway(value, decimals);
  return (rounded < 0 ? minus : '') + Math.abs(rounded).toFixed(decimals);
}

/** A limit as it was written: one decimal at the least, more where it has more. */
export function formatLimit(value: number): string {
  const digits = Math.max(1, (String(Math.abs(value)).split('.')[1] ?? '').length);
  return formatLevel(value, Math.min(digits, 3));
}

/** '52:10', '1:02:10' or '0:30' from seconds, rounded to the second. */
export function formatDuration(seconds: number): string {
  const whole = Math.round(seconds);
  const [h, m, s] = [Math.floor(whole / 3600), Math.floor(whole / 60) % 60, whole % 60];
  const two = (n: number) => String(n).padStart(2, '0');
  return h > 0 ? `${h}:${two(m)}:${two(s)}` : `${m}:${two(s)}`;
}

/** 'hh:mm:ss.mmm' from seconds since the programme's start. */
export function formatTimecode(seconds: number): string {
  const ms = Math.round(Math.max(0, seconds) * 1000);
  const two = (n: number) => String(Math.floor(n)).padStart(2, '0');
  return `${two(ms / 3_600_000)}:${two((ms / 60_000) % 60)}:${two((ms / 1000) % 60)}.${String(ms % 1000).padStart(3, '0')}`;
}

/** '48 kHz', '44.1 kHz'. */
export const formatRate = (hz: number): string => `${hz / 1000} kHz`;

/** '8.6 MB', '1.2 GB': decimal prefixes, three figures at most. */
export function formatBytes(bytes: number): string {
  const units = ['B', 'kB', 'MB', 'GB', 'TB'];
  let value = bytes;
  let unit = 0;
  while (value >= 1000 && unit < units.length - 1) {
    value /= 1000;
    unit++;
  }
  return `${unit === 0 || value >= 100 ? Math.round(value) : value.toFixed(1)} ${units[unit]}`;
}
