/** The time axis of the passage chart. */

/** Round times, far enough apart for their labels. */
export function timeTicks(min: number, max: number, width: number): number[] {
  const most = Math.max(2, width / 78);
  const step =
    [1, 2, 5, 10, 15, 30, 60, 120, 300, 600, 900, 1800, 3600].find((s) => (max - min) / s <= most) ?? 7200;
  const first = Math.ceil(min / step - 1e-9);
  return Array.from(
    { length: Math.max(0, Math.floor(max / step + 1e-9) - first + 1) },
    (_, i) => (first + i) * step,
  );
}
